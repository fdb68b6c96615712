import { bandAround, groupTones, isGhost, withErrors, type FittedTone, type RingSpectrum } from './clusters'
import { exponentialSpectrum, type BinBand, type DecayingTone } from './decay'
import { rippleOf, roomShare } from './roomError'
import { fitTones, MAX_GAMMA_PER_S, type ToneFit } from './toneFit'

/** One more tone must leave less than this share of the residual: a room's tail, which is no line, gains less. */
const SPLIT_GAIN = 0.35
const SPLIT_STARTS_HZ = [1, 2.5]
const MOST_TOGETHER = 4
/** Below -34 dB of the group there is nothing that another tone could explain and a reading would feel. */
const WORTH_EXPLAINING = 4e-4
/** Times the noise's own share of the band: less is noise. */
const ABOVE_NOISE = 3

/**
 * Adds a tone to a group of neighbours where its band clearly holds one more: an uneven head's pair stands a few Hz apart,
 * and a weak line can hide on the flank of a strong one.
 *
 * @param noisePerBin  expected |X|^2 of the noise alone, 0 where unknown
 */
export function splitGroups(ring: RingSpectrum, tones: FittedTone[], noisePerBin: number): FittedTone[] {
  // What the room ripples on every line is not another tone.
  const share = roomShare(ring, tones, noisePerBin)
  const limits = { noisePerBin, worth: Math.max(WORTH_EXPLAINING, share ** 2), ripple: rippleOf(share) }
  let all = [...tones].sort((a, b) => a.frequencyHz - b.frequencyHz)
  for (const group of groupTones(all)) {
    if (group.every(t => t.gammaPerS < 0.5)) continue
    let members = group
    while (members.length < MOST_TOGETHER) {
      const grown = grow(ring, members, all, limits)
      if (!grown) break
      const old = members
      all = [...all.filter(t => !old.includes(t)), ...grown].sort((a, b) => a.frequencyHz - b.frequencyHz)
      members = grown
    }
  }
  return all
}

function grow(ring: RingSpectrum, members: FittedTone[], all: FittedTone[], limits: { noisePerBin: number, worth: number, ripple: number }): FittedTone[] | undefined {
  const band = bandAround(ring, members, all)
  const base = fitTones(ring, band, members, 4)
  if (base.residual < Math.max(limits.worth * base.total, ABOVE_NOISE * limits.noisePerBin * band.count)) return undefined
  let best: ToneFit | undefined
  for (const starts of startsFor(ring, band, base.tones)) {
    let fit = fitTones(ring, band, starts, 3)
    if (fit.residual > 0.9 * base.residual) continue
    fit = fitTones(ring, band, fit.tones, 5)
    if (!best || fit.residual < best.residual) best = fit
  }
  if (!best || best.residual > SPLIT_GAIN * base.residual) return undefined
  best = fitTones(ring, band, best.tones, 10)
  return plausible(best.tones, band, ring, limits.ripple) ? withErrors(ring, band, best) : undefined
}

type Start = { frequencyHz: number, gammaPerS: number }

function startsFor(ring: RingSpectrum, band: BinBand, tones: DecayingTone[]): Start[][] {
  const gamma = tones.map(t => t.gammaPerS).sort((a, b) => a - b)[tones.length >> 1]!
  const strongest = tones.reduce((a, b) => (Math.hypot(b.re, b.im) > Math.hypot(a.re, a.im) ? b : a))
  const starts: Start[][] = [[...tones, { frequencyHz: loudestLeft(ring, band, tones), gammaPerS: gamma }]]
  const others = tones.filter(t => t !== strongest)
  for (const apart of SPLIT_STARTS_HZ) {
    starts.push([...others, ...[-1, 1].map(side => ({ frequencyHz: strongest.frequencyHz + side * apart, gammaPerS: 0.8 * strongest.gammaPerS }))])
  }
  return starts
}

function loudestLeft(ring: RingSpectrum, band: BinBand, tones: DecayingTone[]): number {
  const rest = band.values.slice()
  const g = new Float64Array(2 * band.count)
  for (const tone of tones) {
    exponentialSpectrum(ring, tone.frequencyHz, tone.gammaPerS, band.from, band.count, g)
    for (let k = 0; k < g.length; k += 2) {
      rest[k]! -= tone.re * g[k]! - tone.im * g[k + 1]!
      rest[k + 1]! -= tone.re * g[k + 1]! + tone.im * g[k]!
    }
  }
  let best = 0
  for (let k = 1; k < band.count; k++) {
    if (rest[2 * k]! ** 2 + rest[2 * k + 1]! ** 2 > rest[2 * best]! ** 2 + rest[2 * best + 1]! ** 2) best = k
  }
  return (band.from + best) * ring.spectrum.stepHz
}

/** Every tone inside the band, none a ghost of another, and of two that overlap neither a cancelling twin of the other. */
function plausible(tones: DecayingTone[], band: BinBand, ring: RingSpectrum, ripple: number): boolean {
  const [lo, hi] = [band.from * ring.spectrum.stepHz, (band.from + band.count) * ring.spectrum.stepHz]
  return tones.every((a, i) => a.frequencyHz > lo && a.frequencyHz < hi && a.gammaPerS < 0.95 * MAX_GAMMA_PER_S && tones.every((b, j) => {
    if (i === j) return true
    const apart = Math.abs(a.frequencyHz - b.frequencyHz)
    const decays = (a.gammaPerS + 0.1) / (b.gammaPerS + 0.1)
    const overlap = apart < Math.min(a.gammaPerS, b.gammaPerS) / Math.PI
    return !isGhost(a, b, ripple) && (!overlap || Math.max(decays, 1 / decays) < 3)
  }))
}
