import { bandAround, groupTones, type FittedTone, type RingSpectrum } from './clusters'
import { exponentialSpectrum } from './decay'
import type { Ring, SpectralLine } from './lines'
import { spectrumOf } from './spectrum'

/** A rise of pitch that dies away: f(t) = f at rest (1 + share exp(-ratePerS t)), t from where listening began. */
export interface Chirp {
  /** Share of the pitch at rest. */
  share: number
  standardError: number
  ratePerS: number
}

/** Rates that are tried, 1/s: twice the decay of whichever lines stretch the film most. */
const RATES_PER_S = [12, 20, 33, 55, 90, 150]
/** Groups of lines that have a say: those that hold a line at least this loud, dB, the loudest few. */
const LOUD_DB = -26
const MOST_GROUPS = 8
/** Never surer than this of the rate's and the lines' own part in it, share of the chirp. */
const LEAST_DOUBT = 0.05

/**
 * One chirp shared by the loud lines of a ring, from what their fit as constant tones leaves over.
 *
 * Stretching the film raises every mode's pitch by the same share, which falls with the ring's energy (Fletcher & Rossing,
 * The Physics of Musical Instruments, ch. 3). To first order that adds i 2 pi f share (1 - exp(-rate t)) / rate to each
 * tone: the difference of two decaying tones' spectra. Its part that no change of amplitude, decay or frequency can
 * imitate is sought in the rest; groups of lines are then averaged, the error enlarged where they disagree (Birge).
 * @returns the likeliest of the rates; undefined where no line is loud enough
 */
export function findChirp(ring: Ring, lines: SpectralLine[]): Chirp | undefined {
  const { grid, groups } = loudGroups(ring, lines)
  let best: Chirp | undefined
  for (const ratePerS of RATES_PER_S) {
    const chirp = pooled(groups.map(g => chirpOf(grid, g, ratePerS)).filter(c => c !== undefined), ratePerS)
    if (chirp && (!best || Math.abs(chirp.share) / chirp.standardError > Math.abs(best.share) / best.standardError)) best = chirp
  }
  return best
}

function loudGroups(ring: Ring, lines: SpectralLine[]): { grid: RingSpectrum, groups: GroupRest[] } {
  const spectrum = spectrumOf(ring.samples, ring.sampleRateHz)
  const grid: RingSpectrum = { sampleRateHz: ring.sampleRateHz, length: ring.samples.length, size: spectrum.size, spectrum }
  const tones = lines.map(toTone).sort((a, b) => a.frequencyHz - b.frequencyHz)
  const groups = groupTones(tones)
    .map(members => ({ members, levelDb: Math.max(...members.map(t => t.levelDb)) }))
    .filter(g => g.levelDb > LOUD_DB && g.members.every(t => !t.steady))
    .sort((a, b) => b.levelDb - a.levelDb)
    .slice(0, MOST_GROUPS)
    .map(g => restOf(grid, g.members, tones))
  return { grid, groups }
}

/**
 * How much of a chirp a constant tone's frequency takes up, as a share of it.
 *
 * Least squares under the tone's own weight exp(-2 gamma t), a = rate / (2 gamma): the slope of (1 - exp(-rate t)) / rate
 * on t is 1 / (1 + a)^2, by its series in Laguerre polynomials (Abramowitz & Stegun, ch. 22).
 */
export function chirpTakenUp(gammaPerS: number, ratePerS: number): number {
  return (1 + ratePerS / (2 * Math.max(0.5, gammaPerS))) ** -2
}

interface LoudTone extends FittedTone { levelDb: number, steady: boolean }

function toTone(line: SpectralLine): LoudTone {
  return {
    frequencyHz: line.frequencyHz, gammaPerS: line.gammaPerS, levelDb: line.levelDb, steady: line.steady,
    re: line.amplitude / 2 * Math.cos(line.phaseRad), im: line.amplitude / 2 * Math.sin(line.phaseRad),
    standardErrorHz: line.standardErrorHz, amplitudeError: 0,
  }
}

/** What the tones of a group leave of their band, and an orthonormal basis of all that a change of them can do there. */
interface GroupRest { members: FittedTone[], from: number, count: number, rest: Float64Array, basis: Float64Array[] }

function restOf(grid: RingSpectrum, members: FittedTone[], all: FittedTone[]): GroupRest {
  const { from, count, values: rest } = bandAround(grid, members, all)
  const basis: Float64Array[] = []
  for (const tone of members) {
    const g = new Float64Array(2 * count)
    const slope = new Float64Array(2 * count)
    exponentialSpectrum(grid, tone.frequencyHz, tone.gammaPerS, from, count, g, slope)
    for (const column of [g, turned(g), slope, turned(slope)]) {
      orthogonalise(column, basis)
      const norm = Math.sqrt(dot(column, column))
      if (norm > 0) basis.push(column.map(v => v / norm))
    }
    addTimes(rest, g0(grid, tone, from, count), -tone.re, -tone.im)
  }
  orthogonalise(rest, basis)
  return { members, from, count, rest, basis }
}

const g0 = (grid: RingSpectrum, tone: FittedTone, from: number, count: number, extraGamma = 0) => {
  const g = new Float64Array(2 * count)
  exponentialSpectrum(grid, tone.frequencyHz, tone.gammaPerS + extraGamma, from, count, g)
  return g
}

function chirpOf(grid: RingSpectrum, { members, from, count, rest, basis }: GroupRest, ratePerS: number): Chirp | undefined {
  const column = new Float64Array(2 * count)
  for (const tone of members) {
    const turn = 2 * Math.PI * tone.frequencyHz / ratePerS
    addTimes(column, g0(grid, tone, from, count), -tone.im * turn, tone.re * turn)
    addTimes(column, g0(grid, tone, from, count, ratePerS), tone.im * turn, -tone.re * turn)
  }
  const whole = dot(column, column)
  orthogonalise(column, basis)
  const norm = dot(column, column)
  if (!(norm > 1e-8 * whole)) return undefined
  const share = dot(column, rest) / norm
  let weighted = 0
  for (let k = 0; k < column.length; k++) weighted += column[k]! ** 2 * (rest[k]! - share * column[k]!) ** 2
  // Bins of a padded transform are correlated copies, size / length of each.
  const padding = grid.size / grid.length
  const freedom = Math.max(2, 2 * count / padding - basis.length - 1)
  const even = (dot(rest, rest) - share ** 2 * norm) / freedom
  return { share, standardError: Math.sqrt(Math.max(even, weighted / norm * padding) / norm), ratePerS }
}

/** Mean weighted by 1 / variance, its error enlarged by the Birge ratio. Source: Birge, Phys. Rev. 40 (1932) 207. */
function pooled(chirps: Chirp[], ratePerS: number): Chirp | undefined {
  if (chirps.length === 0) return undefined
  const weights = chirps.map(c => 1 / c.standardError ** 2)
  const total = weights.reduce((sum, w) => sum + w, 0)
  const share = chirps.reduce((sum, c, i) => sum + weights[i]! * c.share, 0) / total
  const scatter = chirps.length > 1 ? chirps.reduce((sum, c, i) => sum + weights[i]! * (c.share - share) ** 2, 0) / (chirps.length - 1) : 1
  return { share, standardError: Math.hypot(Math.sqrt(Math.max(1, scatter) / total), LEAST_DOUBT * share), ratePerS }
}

function orthogonalise(column: Float64Array, basis: Float64Array[]) {
  // Twice: once leaves rounding errors where columns are alike.
  for (let pass = 0; pass < 2; pass++) {
    for (const b of basis) {
      const along = dot(b, column)
      for (let k = 0; k < column.length; k++) column[k]! -= along * b[k]!
    }
  }
}

function addTimes(into: Float64Array, g: Float64Array, re: number, im: number) {
  for (let k = 0; k < g.length; k += 2) {
    into[k]! += re * g[k]! - im * g[k + 1]!
    into[k + 1]! += re * g[k + 1]! + im * g[k]!
  }
}

function turned(g: Float64Array): Float64Array {
  const out = new Float64Array(g.length)
  for (let k = 0; k < g.length; k += 2) {
    out[k] = -g[k + 1]!
    out[k + 1] = g[k]!
  }
  return out
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let k = 0; k < a.length; k++) sum += a[k]! * b[k]!
  return sum
}
