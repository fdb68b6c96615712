import { exponentialSpectrum, subtractTone, type BinBand, type DecayingTone, type RingGrid } from './decay'
import type { ComplexSpectrum } from './spectrum'
import { fitTones, MAX_GAMMA_PER_S, type ToneFit } from './toneFit'

/** A tone with what its last fit says of it. */
export interface FittedTone extends DecayingTone {
  standardErrorHz: number
  /** Standard error of the complex amplitude, same unit. */
  amplitudeError: number
  /** The part of standardErrorHz that does not depend on the noise: Hz for noise of one unit in each part of a bin. */
  errorPerUnitHz: number
  /** Its energy in the ring over the noise's part that one tone swallows: twice the gain in log likelihood. */
  energyOverNoise: number
}

export interface RingSpectrum extends RingGrid { spectrum: ComplexSpectrum }

/** Tones nearer than this are fitted together, at most four at a time. */
const TOGETHER_HZ = 18
const MOST_TOGETHER = 4
/** Tones whose flank reaches less than this share of a cluster's own peak are left out of its band. */
const FARTHEST_SHARE = 1e-3

/**
 * Fits every tone again, neighbours together, all others taken off as they stand; one sweep in order of frequency.
 * @param iterations  steps of each group's fit at most, a count
 * @param farthest    tones whose flank reaches less than this share of a group's own peak are left out of its band
 */
export function sweep(ring: RingSpectrum, tones: FittedTone[], iterations: number, farthest = FARTHEST_SHARE): FittedTone[] {
  let all = [...tones].sort((a, b) => a.frequencyHz - b.frequencyHz)
  for (const members of groupTones(all)) {
    const band = bandAround(ring, members, all, farthest)
    const fitted = withErrors(ring, band, fitTones(ring, band, members, iterations))
    all = all.map(tone => members.includes(tone) ? fitted[members.indexOf(tone)]! : tone)
  }
  return all.sort((a, b) => a.frequencyHz - b.frequencyHz)
}

/** Splits tones, sorted by frequency, into groups of near neighbours. */
export function groupTones<T extends DecayingTone>(sorted: T[]): T[][] {
  const groups: T[][] = []
  for (const tone of sorted) {
    const group = groups.at(-1)
    const last = group?.at(-1)
    // Half the sum of the two full widths: there the flanks cross.
    if (group && last && group.length < MOST_TOGETHER && tone.frequencyHz - last.frequencyHz < Math.max(TOGETHER_HZ, (tone.gammaPerS + last.gammaPerS) / (2 * Math.PI))) group.push(tone)
    else groups.push([tone])
  }
  return groups
}

/** The bins that carry a cluster, every other tone and all images taken off. */
export function bandAround(ring: RingSpectrum, members: DecayingTone[], all: DecayingTone[], farthest = FARTHEST_SHARE): BinBand {
  const step = ring.spectrum.stepHz
  const gamma = Math.max(...members.map(t => t.gammaPerS))
  const margin = Math.max(12, Math.min(80, gamma))
  const lowest = Math.min(...members.map(t => t.frequencyHz))
  const highest = Math.max(...members.map(t => t.frequencyHz))
  const from = Math.max(1, Math.floor((lowest - margin) / step))
  const to = Math.min(ring.size / 2 - 1, Math.ceil((highest + margin) / step))
  const band = { from, count: to - from + 1, values: ring.spectrum.bins.slice(2 * from, 2 * to + 2) }
  const scratch = new Float64Array(2 * band.count)
  const centre = (from + to) / 2 * step
  const own = Math.max(...members.map(t => magnitudeAt(t, t.frequencyHz)))
  for (const tone of all) {
    if (members.includes(tone)) subtractTone(ring, tone, band, scratch, 'image')
    else if (own === 0 || magnitudeAt(tone, Math.abs(centre - tone.frequencyHz) > margin ? centre : tone.frequencyHz) > farthest * own) subtractTone(ring, tone, band, scratch)
  }
  return band
}

/** |a| / |gamma + 2 pi i (f - f0)|: height of a tone's flank, up to the sample rate. */
function magnitudeAt(tone: DecayingTone, frequencyHz: number): number {
  return Math.hypot(tone.re, tone.im) / Math.hypot(Math.max(tone.gammaPerS, 0.5), 2 * Math.PI * (frequencyHz - tone.frequencyHz))
}

/**
 * Standard errors of a fit: the inverse normal matrix times the residual's variance, bins of a padded transform counted as
 * the size / length correlated copies that they are.
 *
 * The room's tail stands around its own line and not evenly over the band, so a tone's variance is also taken with the
 * residual weighted as that tone weighs it, and the larger counts.
 */
export function withErrors(ring: RingSpectrum, band: BinBand, fit: ToneFit): FittedTone[] {
  const padding = ring.size / ring.length
  const freedom = Math.max(2, 2 * band.count / padding - 4 * fit.tones.length)
  const even = fit.residual * padding / (2 * band.count) * (2 * band.count / padding / freedom)
  const local = fit.tones.length ? localVariance(ring, band, fit) : []
  const size = 4 * fit.tones.length
  return fit.tones.map((tone, p) => {
    const variance = Math.max(even, local[p]! * padding)
    const diagonal = (row: number) => (fit.inverse ? fit.inverse[(4 * p + row) * (size + 1)]! : Infinity)
    return {
      ...tone,
      standardErrorHz: Math.sqrt(variance * diagonal(3)),
      errorPerUnitHz: Math.sqrt(diagonal(3)),
      amplitudeError: Math.sqrt(variance * Math.max(diagonal(0), diagonal(1))),
      energyOverNoise: (tone.re ** 2 + tone.im ** 2) * spectralEnergy(ring, tone.gammaPerS) / variance,
    }
  })
}

/** Sum of |X|^2 over all bins of a tone of unit amplitude, by Parseval. */
function spectralEnergy(ring: RingGrid, gammaPerS: number): number {
  const fall = 2 * Math.max(gammaPerS, 1e-3) / ring.sampleRateHz
  return ring.size * (1 - Math.exp(-fall * ring.length)) / (1 - Math.exp(-fall))
}

/** Mean square of what a fit leaves, per real part of a bin, weighted as each tone's own frequency weighs the bins. */
export function localVariance(ring: RingSpectrum, band: BinBand, fit: ToneFit): number[] {
  const rest = band.values.slice()
  const shapes = fit.tones.map((tone) => {
    const g = new Float64Array(2 * band.count)
    const slope = new Float64Array(2 * band.count)
    exponentialSpectrum(ring, tone.frequencyHz, tone.gammaPerS, band.from, band.count, g, slope)
    for (let k = 0; k < g.length; k += 2) {
      rest[k]! -= tone.re * g[k]! - tone.im * g[k + 1]!
      rest[k + 1]! -= tone.re * g[k + 1]! + tone.im * g[k]!
    }
    return slope
  })
  return shapes.map((slope) => {
    let weighted = 0
    let weights = 0
    for (let k = 0; k < slope.length; k += 2) {
      const weight = slope[k]! ** 2 + slope[k + 1]! ** 2
      weighted += weight * (rest[k]! ** 2 + rest[k + 1]! ** 2) / 2
      weights += weight
    }
    return weights > 0 ? weighted / weights : 0
  })
}

/**
 * Drops tones that did not hold up: lost in noise, at the fit's limits, or a ripple on the flank of a stronger one.
 *
 * Of each group of neighbours only the worst goes at a time: tones too many spoil each other's errors, and the right one
 * among them stands again once the fit is repeated.
 * @param ripple  share of another's flank that a tone must exceed at its place
 */
export function dropWorst(tones: FittedTone[], toHz: number, ripple: number): FittedTone[] {
  const worst = groupTones([...tones].sort((a, b) => a.frequencyHz - b.frequencyHz)).map((group) => {
    const failing = group.filter(t => !holds(t, toHz) || tones.some(other => other !== t && isGhost(t, other, ripple)))
    return failing.sort((a, b) => certainty(a) - certainty(b))[0]
  })
  return tones.filter(t => !worst.includes(t))
}

/** Of some 4000 places and several decays, noise alone reaches 26 about once in thirty recordings. */
const LEAST_ENERGY = 28

const certainty = (t: FittedTone) => Math.hypot(t.re, t.im) / (t.amplitudeError || 1e-300)

function holds(t: FittedTone, toHz: number): boolean {
  return certainty(t) > 2 && t.energyOverNoise > LEAST_ENERGY && t.gammaPerS < 0.95 * MAX_GAMMA_PER_S && t.frequencyHz > 15 && t.frequencyHz < toHz
}

/** True where a tone is a ripple on another's flank, or the weaker of two that stand on the same place. */
export function isGhost(tone: DecayingTone, other: DecayingTone, ripple: number): boolean {
  const height = magnitudeAt(tone, tone.frequencyHz)
  if (height > magnitudeAt(other, other.frequencyHz)) return false
  const width = Math.min(other.gammaPerS, tone.gammaPerS) / Math.PI
  const apart = Math.abs(other.frequencyHz - tone.frequencyHz)
  return apart < Math.max(0.2 * width, 0.3) || height < ripple * magnitudeAt(other, tone.frequencyHz)
}
