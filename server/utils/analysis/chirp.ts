import { bandAround, groupTones, type FittedTone, type RingSpectrum } from './clusters'
import { exponentialSpectrum } from './decay'
import { isSteady, type RingLook } from './lines'

/** A rise of pitch that dies away: f(t) = f at rest (1 + share exp(-ratePerS t)), t from where listening began. */
export interface Chirp {
  /** Share of the pitch at rest. */
  share: number
  standardError: number
  ratePerS: number
}

/** Rates that are tried, 1/s. The film's stretch falls as the energy of the lines that hold it, twice as fast as they do; recordings of real toms fall as slowly as the lines. */
const RATES_PER_S = [5, 8, 12, 20, 33, 55, 90, 150]
const SLOWEST = { first: 1.2, early: 1.2, late: 0.8 }
const FASTEST = 2.6
/** Groups of lines that have a say: those that hold a line at least this loud, dB, the loudest few. */
const LOUD_DB = -26
const MOST_GROUPS = 8
/** Lines this loud, dB, set the rates that are tried. */
const STRETCHING_DB = -14
/** Never surer than this of the rate's and the lines' own part in it, share of the chirp. */
const LEAST_DOUBT = 0.05

/** Degrees of freedom of a group's say: the fewer, the sooner it is outvoted. */
const FREEDOM = 2
/** Neighbours fitted together follow a glide together, each a part of the way: their say counts with this times their error. */
const TOGETHER_DOUBT = 3

/** One group (nearly) alone: no other bears it out. */
const LONE_DOUBT = 2
const NEARLY_LONE = 1.3
/** A normal distribution's standard deviation over the median of |deviations|. */
const MEDIAN_TO_SIGMA = 1.4826

/** What one group of neighbours has to say of a chirp. */
export interface GroupChirp extends Chirp { members: FittedTone[] }

/**
 * One chirp shared by the loud lines of a ring, from what their fit as constant tones leaves over.
 *
 * Stretching the film raises every mode's pitch by the same share, which falls with the ring's energy (Fletcher & Rossing,
 * The Physics of Musical Instruments, ch. 3). To first order that adds i 2 pi f share (1 - exp(-rate t)) / rate to each
 * tone: the difference of two decaying tones' spectra. Its part that no change of amplitude, decay or frequency can
 * imitate is sought in the rest; groups of lines then vote, and the error is enlarged where they disagree.
 * @param when  late in a ring that glided before, slower rates are tried too
 * @returns the likeliest of the rates; undefined where no line is loud enough
 */
export function findChirp({ grid, tones }: RingLook, when: 'first' | 'early' | 'late'): Chirp | undefined {
  const groups = loudGroups(grid, tones)
  let best: Chirp | undefined
  for (const ratePerS of ratesOf(tones, when)) {
    const chirp = pooled(chirpsOf(grid, groups, ratePerS), ratePerS)
    if (chirp && (!best || Math.abs(chirp.share) / chirp.standardError > Math.abs(best.share) / best.standardError)) best = chirp
  }
  return best
}

/** What each group of loud neighbours says of a chirp of this rate; see findChirp. */
export function groupChirps(grid: RingSpectrum, tones: FittedTone[], ratePerS: number): GroupChirp[] {
  return chirpsOf(grid, loudGroups(grid, tones), ratePerS)
}

const chirpsOf = (grid: RingSpectrum, groups: GroupRest[], ratePerS: number): GroupChirp[] =>
  groups.map(g => chirpOf(grid, g, ratePerS)).filter(c => c !== undefined)

const levelOf = (tone: FittedTone) => 20 * Math.log10(Math.hypot(tone.re, tone.im) + 1e-300)

function ratesOf(tones: FittedTone[], when: 'first' | 'early' | 'late'): number[] {
  const decaying = tones.filter(t => !isSteady(t))
  const loudest = Math.max(...decaying.map(levelOf))
  const gammas = decaying.filter(t => levelOf(t) > loudest + STRETCHING_DB).map(t => t.gammaPerS)
  const [slow, fast] = [SLOWEST[when] * Math.min(...gammas), FASTEST * Math.max(...gammas)]
  return RATES_PER_S.filter(rate => rate >= slow && rate <= fast)
}

function loudGroups(grid: RingSpectrum, tones: FittedTone[]): GroupRest[] {
  const loudest = Math.max(...tones.filter(t => !isSteady(t)).map(levelOf))
  return groupTones([...tones].sort((a, b) => a.frequencyHz - b.frequencyHz))
    .map(members => ({ members, level: Math.max(...members.map(levelOf)) }))
    .filter(g => g.level > loudest + LOUD_DB && g.members.every(t => !isSteady(t)))
    .sort((a, b) => b.level - a.level)
    .slice(0, MOST_GROUPS)
    .map(g => restOf(grid, g.members, tones))
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

function chirpOf(grid: RingSpectrum, { members, from, count, rest, basis }: GroupRest, ratePerS: number): GroupChirp | undefined {
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
  const doubt = members.length > 1 ? TOGETHER_DOUBT : 1
  return { share, standardError: doubt * Math.sqrt(Math.max(even, weighted / norm * padding) / norm), ratePerS, members }
}

/**
 * The share that most groups agree on: Student's t with few degrees of freedom for each, so that a group whose lines are
 * not what they seem is outvoted; started from each group's own, since there can be two camps.
 */
function pooled(chirps: GroupChirp[], ratePerS: number): Chirp | undefined {
  let best: { share: number, cost: number, weights: number[] } | undefined
  for (const start of chirps) {
    let share = start.share
    let weights: number[] = []
    for (let i = 0; i < 12; i++) {
      weights = chirps.map(c => (FREEDOM + 1) / (FREEDOM + ((c.share - share) / c.standardError) ** 2) / c.standardError ** 2)
      share = chirps.reduce((sum, c, g) => sum + weights[g]! * c.share, 0) / weights.reduce((sum, w) => sum + w, 0)
    }
    const cost = chirps.reduce((sum, c) => sum + (FREEDOM + 1) / 2 * Math.log(1 + ((c.share - share) / c.standardError) ** 2 / FREEDOM), 0)
    if (!best || cost < best.cost) best = { share, cost, weights }
  }
  if (!best) return undefined
  const total = best.weights.reduce((sum, w) => sum + w, 0)
  const squares = best.weights.reduce((sum, w) => sum + w * w, 0)
  const byErrors = (total ** 2 / squares < NEARLY_LONE ? LONE_DOUBT : 1) / Math.sqrt(total)
  const standardError = Math.max(byErrors, scatterOf(chirps, best.share) / Math.sqrt(chirps.length))
  return { share: best.share, standardError: Math.hypot(standardError, LEAST_DOUBT * best.share), ratePerS }
}

/**
 * How far groups stand from the share they should agree on, beyond their own errors: the median, groups weighted by
 * 1 / error. A pair taken for one tone, or a line hidden under another, looks like a glide of its own, but not like the
 * others'.
 */
function scatterOf(chirps: GroupChirp[], share: number): number {
  const off = chirps.map(c => ({ by: Math.sqrt(Math.max(0, (c.share - share) ** 2 - c.standardError ** 2)), weight: 1 / c.standardError })).sort((a, b) => a.by - b.by)
  if (chirps.length < 3) return off.at(-1)!.by
  const half = off.reduce((sum, o) => sum + o.weight, 0) / 2
  let passed = 0
  return MEDIAN_TO_SIGMA * off.find(o => (passed += o.weight) >= half)!.by
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
