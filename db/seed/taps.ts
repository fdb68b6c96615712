import wavefile from 'wavefile'
import { type DrumModel, strikeAmplitudes, synthesise } from '../../shared/acoustics'
import type { SeededRandom } from './random'

export interface DemoTap {
  model: DrumModel
  tensionNPerM: number
  otherTensionNPerM?: number
  /** What the model cannot know of this drum: a factor on its air. */
  airScale: { axisymmetric: number, others: number }
  /** Loss factor of the film, dimensionless. */
  filmLoss: number
  /** Place of the strike by radius. */
  radialPosition: number
  /** Split of (m,n) pairs by unevenness, relative. */
  split: number
}

const SAMPLE_RATE_HZ = 16_000
const DURATION_S = 1.7
const QUIET_S = 0.3
/** Up to here modes are made: beyond, a tap of a soft stick has nothing left. */
const HIGHEST_HZ = 1400
const FULL_SCALE = 32_767

/**
 * A simulated tap as a 16-bit mono WAV: the modes of the drum with their own decays, struck once after 0.3 s of a quiet
 * room. Invented data for the demo; the accuracy tests use the independent drum of tests/support/drum instead.
 */
export function demoTapWav(tap: DemoTap, random: SeededRandom): Uint8Array {
  const { geometry, film } = tap.model.options
  const modes = tap.model.predictModes({ tensionNPerM: tap.tensionNPerM, otherTensionNPerM: tap.otherTensionNPerM, airScale: tap.airScale, maxHz: HIGHEST_HZ })
  const amplitudes = strikeAmplitudes({
    modes, radiusM: geometry.radiusM, arealDensityKgM2: film.arealDensityKgM2,
    strike: { radialPosition: tap.radialPosition, contactRatio: 0.06, contactTimeS: random.between(0.0012, 0.0022) },
  })
  const partials = modes.flatMap((mode, index) => {
    const omega = 2 * Math.PI * mode.frequencyHz
    // What the microphone hears of a mode: its velocity, times what place and room do to it.
    const amplitude = amplitudes[index]! * omega * Math.exp(0.35 * random.normal())
    const decayPerS = mode.radiationDampingPerS + tap.filmLoss * omega / 2 + 1.5
    const pair = mode.m === 0 ? [[0, 1]] as const : [[-1, 0.6], [1, 0.4]] as const
    return pair.map(([side, share]) => ({ frequencyHz: mode.frequencyHz * (1 + side * tap.split / 2), decayPerS, amplitude: amplitude * share }))
  })
  const ring = synthesise({ partials, sampleRateHz: SAMPLE_RATE_HZ, durationS: DURATION_S, startS: QUIET_S, attackS: 0.001 })
  const peak = ring.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
  const level = random.between(0.25, 0.7) / peak
  const noise = level * peak * 10 ** (random.between(-62, -46) / 20)
  const samples = Int16Array.from(ring, value => Math.round(FULL_SCALE * (value * level + noise * random.normal())))
  const file = new wavefile.WaveFile()
  file.fromScratch(1, SAMPLE_RATE_HZ, '16', samples)
  return file.toBuffer()
}
