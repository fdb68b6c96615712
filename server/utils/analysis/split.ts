import { bandAround, groupTones, isGhost, localVariance, withErrors, type FittedTone, type RingSpectrum } from './clusters'
import { exponentialSpectrum, type BinBand, type DecayingTone } from './decay'
import { rationalTones } from './rational'
import { rippleOf } from './roomError'
import { fitTones, MAX_GAMMA_PER_S, type ToneFit } from './toneFit'

/** One more tone must leave less than this share of the residual: a room's tail, which is no line, gains less. */
const SPLIT_GAIN = 0.35
/** Or leave nothing but noise, at most this much of it, over the whole band and where the tones stand. */
const NOISE_LEFT = 1.5
const NOISE_LEFT_LOCALLY = 2
/** Twice the gain in log likelihood against white noise: by chance, 4 unknowns gain 30 once in 200 000. */
const SURE_GAIN = 30
const SPLIT_STARTS_HZ = [1, 2.5]
const MOST_TOGETHER = 4
/** Below -34 dB of the group there is nothing that another tone could explain and a reading would feel. */
const WORTH_EXPLAINING = 4e-4
/** Where more than noise is left after the split, a room may be all there was: its tail seldom leaves more than -24 dB. */
const CLEARLY_MORE = 4e-3
/** In a room without a tail, down to -70 dB of it, where the noise allows. */
const WORTH_IN_NOISE = 1e-7
const NEAR_NOISE = 1.15
const FAR_FROM_NOISE = 4
const HALF_WAY = 0.5
/** Residuals of a group this close are the same. */
const SAME = 0.1

/**
 * Adds a tone to a group of neighbours where its band clearly holds one more: an uneven head's pair stands a few Hz apart,
 * and a weak line can hide on the flank of a strong one.
 *
 * @param noisePerBin  expected |X|^2 of the noise alone, 0 where unknown
 * @param whole        what was left around groups that were tried, by where they stand: tried again only where it changed
 */
export function splitGroups(ring: RingSpectrum, tones: FittedTone[], noisePerBin: number, whole: Map<string, number>): FittedTone[] {
  let all = [...tones].sort((a, b) => a.frequencyHz - b.frequencyHz)
  for (const group of groupTones(all)) {
    if (group.every(t => t.gammaPerS < 0.5)) continue
    let members = group
    while (members.length < MOST_TOGETHER) {
      const grown = grow(ring, members, all, noisePerBin, whole)
      if (!grown) break
      const old = members
      all = [...all.filter(t => !old.includes(t)), ...grown].sort((a, b) => a.frequencyHz - b.frequencyHz)
      members = grown
    }
  }
  return all
}

function grow(ring: RingSpectrum, members: FittedTone[], all: FittedTone[], noisePerBin: number, whole: Map<string, number>): FittedTone[] | undefined {
  const band = bandAround(ring, members, all)
  const base = fitTones(ring, band, members, 4)
  // The bins of a padded transform are size / length correlated copies of what they hold.
  const noise = noisePerBin * ring.size / ring.length
  const floor = noisePerBin * band.count
  if (2 * (base.residual - floor) < SURE_GAIN * noise || base.residual < (noise > 0 ? WORTH_IN_NOISE : WORTH_EXPLAINING) * base.total) return undefined
  const place = members.map(t => Math.round(2 * t.frequencyHz)).join()
  if (Math.abs((whole.get(place) ?? 0) / base.residual - 1) < SAME) return undefined
  whole.set(place, base.residual)
  const loud = base.residual > CLEARLY_MORE * base.total
  let best: ToneFit | undefined
  for (const starts of startsFor(ring, band, base.tones)) {
    let fit = fitTones(ring, band, starts, 3)
    if (fit.residual < 0.9 * base.residual || 2 * (base.residual - fit.residual) > SURE_GAIN * noise) fit = fitTones(ring, band, fit.tones, 5)
    if (!best || fit.residual < best.residual) best = fit
    // So little over the noise, no other start can do better; so much, and so little to begin with, it is the room.
    if (best.residual < NEAR_NOISE * floor || (!loud && hopeless(best, base, floor))) break
  }
  if (!best || 2 * (base.residual - best.residual) < SURE_GAIN * noise || (!loud && hopeless(best, base, floor))) return undefined
  best = fitTones(ring, band, best.tones, 10)
  const clear = loud && best.residual < SPLIT_GAIN * base.residual
  if (!clear && !onlyNoiseLeft(ring, band, best, noisePerBin)) return undefined
  // What the room ripples on every line is not another tone.
  const ripple = rippleOf(Math.sqrt(Math.max(0, best.residual - floor) / best.total))
  return plausible(best.tones, band, ring, ripple) ? withErrors(ring, band, best) : undefined
}

/** Far over the noise, and not on the way there either. */
const hopeless = (fit: ToneFit, base: ToneFit, floor: number) => fit.residual > Math.max(FAR_FROM_NOISE * floor, HALF_WAY * base.residual)

function onlyNoiseLeft(ring: RingSpectrum, band: BinBand, fit: ToneFit, noisePerBin: number): boolean {
  return fit.residual < NOISE_LEFT * noisePerBin * band.count && localVariance(ring, band, fit).every(v => 2 * v < NOISE_LEFT_LOCALLY * noisePerBin)
}

type Start = { frequencyHz: number, gammaPerS: number }

function startsFor(ring: RingSpectrum, band: BinBand, tones: DecayingTone[]): Start[][] {
  const gamma = tones.map(t => t.gammaPerS).sort((a, b) => a - b)[tones.length >> 1]!
  const strongest = tones.reduce((a, b) => (Math.hypot(b.re, b.im) > Math.hypot(a.re, a.im) ? b : a))
  const starts: Start[][] = []
  const direct = rationalTones(ring, band, tones.length + 1)
  if (direct.length > 0) starts.push(direct.map(t => ({ ...t, gammaPerS: Math.min(t.gammaPerS, 0.9 * MAX_GAMMA_PER_S) })))
  starts.push([...tones, { frequencyHz: loudestLeft(ring, band, tones), gammaPerS: gamma }])
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
