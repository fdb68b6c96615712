/**
 * A recorded tap of the simulated drum, with the truth beside it. Deterministic for a given spec.
 *
 * Signal-to-noise ratio: mean power of the tap's first 0.5 s over the power of the white noise.
 */
import { BASIS } from './airTable'
import { seededRandom } from './random'
import { renderLines, soundingLines } from './ring'
import type { Line } from './ring'
import { addRoom, roomTail } from './room'
import { solveDrum } from './modes'
import type { DrumModel } from './modes'
import type { SimDrum, SimMicrophone, SimRecording, SimResult, SimStrike, SimTap, SimTruth } from './types'
import { mixedModes } from './unevenness'
import type { MixedMode } from './unevenness'

interface Solved { model: DrumModel, modes: MixedMode[] }

const solvedDrums = new Map<string, Solved>()

/** The struck head is always the first film of the model; for a strike on the resonant side the drum is turned over. */
function struckDrum(drum: SimDrum, strike: SimStrike): SimDrum {
  if (strike.side !== 'resonant') return drum
  if (!drum.resonant) throw new RangeError('this drum has no resonant head')
  return { ...drum, batter: drum.resonant, resonant: drum.batter, unevenness: undefined }
}

function solve(drum: SimDrum, maxHz: number): Solved {
  const key = JSON.stringify([drum, maxHz])
  const found = solvedDrums.get(key)
  if (found) return found
  const model = solveDrum(drum, maxHz)
  const made = { model, modes: mixedModes(model, maxHz) }
  if (solvedDrums.size > 16) solvedDrums.clear()
  solvedDrums.set(key, made)
  return made
}

/** Lines that one strike sounds. */
export function tapLines(drum: SimDrum, strike: SimStrike, microphone: SimMicrophone, maxHz: number): Line[] {
  const { model, modes } = solve(struckDrum(drum, strike), maxHz)
  return soundingLines(model, modes, strike, microphone)
}

/** A mode that moves mostly in the lowest shape of either head. */
function firstShape(line: Line): boolean {
  const sizes = line.mode.leading.root.shape.map(x => Math.hypot(x.re, x.im))
  return sizes.indexOf(Math.max(...sizes)) % BASIS === 0
}

/** The truth about one tap; `lines` are those of `tapLines`. */
export function tapTruth(drum: SimDrum, strike: SimStrike, lines: Line[], onsetS: number): SimTruth {
  const struck = struckDrum(drum, strike)
  const turned = strike.side === 'resonant'
  const loudest = Math.max(...lines.map(line => line.loudness))
  const modes = lines
    .map(line => ({
      m: line.mode.leading.root.m,
      n: line.mode.leading.root.n,
      head: (line.mode.leading.root.head === 'batter') !== turned ? 'batter' as const : 'resonant' as const,
      hz: line.omega / (2 * Math.PI),
      gammaPerS: line.gamma,
      levelDb: 20 * Math.log10(line.loudness / loudest + 1e-12),
    }))
    .sort((a, b) => a.hz - b.hz)
  const branches = lines
    .filter(line => line.mode.leading.root.m === 0 && firstShape(line) && line.tensionShare + line.otherShare > 0.25)
    .sort((a, b) => a.omega - b.omega)
  const named = branches.find(line => line.mode.leading.root.n === 1) ?? branches[0]!
  return {
    tensionNPerM: struck.batter.tensionNPerM,
    resonantTensionNPerM: struck.resonant?.tensionNPerM,
    fundamentalHz: named.freeHz,
    fundamentalBranchesHz: branches.map(line => line.freeHz),
    modes,
    onsetS,
    glideShare: Math.sqrt(1 + (strike.glide ?? 0) * named.tensionShare) - 1,
  }
}

/** Turns clean taps into a recording: room, noise, hum, level. `firstTapAt` is a sample index. */
export function finishRecording(clean: Float64Array, firstTapAt: number, recording: SimRecording): Float64Array {
  const rate = recording.sampleRateHz ?? 48000
  const random = seededRandom(recording.seed)
  const wet = recording.room ? addRoom(clean, roomTail(recording.room, rate, random)) : Float64Array.from(clean)
  let power = 0
  const half = Math.min(wet.length - firstTapAt, Math.round(rate / 2))
  for (let i = 0; i < half; i++) power += wet[firstTapAt + i]! ** 2
  power /= half
  const noise = Math.sqrt(power * 10 ** (-(recording.snrDb ?? 40) / 10))
  for (let i = 0; i < wet.length; i++) wet[i]! += noise * random.normal()
  if (recording.hum) {
    const { hz, snrDb } = recording.hum
    const level = Math.sqrt(2 * power * 10 ** (-snrDb / 10))
    const phases = [random.uniform(0, 6.28), random.uniform(0, 6.28), random.uniform(0, 6.28)]
    for (let i = 0; i < wet.length; i++) {
      phases.forEach((phase, h) => {
        wet[i]! += level / (1 + 2 * h) * Math.cos(2 * Math.PI * hz * (h + 1) * i / rate + phase)
      })
    }
  }
  let peak = 0
  for (const value of wet) peak = Math.max(peak, Math.abs(value))
  const gain = 10 ** ((recording.peakDbfs ?? -6) / 20) / peak
  return wet.map(value => value * gain)
}

export function simulateTap(spec: SimTap): SimResult {
  const { drum, strike, microphone, recording } = spec
  const sampleRateHz = recording.sampleRateHz ?? 48000
  const quiet = Math.round((recording.quietS ?? 0.3) * sampleRateHz)
  const ring = Math.round((recording.ringS ?? 2) * sampleRateHz)
  const lines = tapLines(drum, strike, microphone, Math.min(3000, 0.45 * sampleRateHz))
  const samples = new Float64Array(quiet + ring)
  samples.set(renderLines(lines, strike, ring, sampleRateHz), quiet)
  const truth = tapTruth(drum, strike, lines, quiet / sampleRateHz)
  return { samples: finishRecording(samples, quiet, recording), sampleRateHz, truth }
}
