import { subtractFromRing, type DecayingTone } from './decay'
import { powerOf, ringWindow, spectrumOf } from './spectrum'

export interface PeakCandidate { frequencyHz: number, gammaPerS: number, power: number }

export interface Search {
  /** A peak on the flank of known lines must reach this share of their own amplitude there: the room's tail ripples below it. */
  ripple: number
  sampleRateHz: number
  fromHz: number
  toHz: number
}

export interface SearchResult {
  /** Strongest first. */
  candidates: PeakCandidate[]
  /** Windowed power that a new line must exceed, per block of BLOCK_HZ from fromHz. */
  threshold: Float64Array
}

interface Listening { lengthS: number, riseS: number, laterS: number }
/**
 * Half a second tells lines 2 Hz apart; a tenth hears those that air damps so hard that half a second is mostly noise.
 * Decay is first guessed from how much weaker a peak is laterS later.
 */
const LISTENINGS: Listening[] = [{ lengthS: 0.5, riseS: 0.012, laterS: 0.08 }, { lengthS: 0.1, riseS: 0.003, laterS: 0.015 }]
export const BLOCK_HZ = 40
/** Above the mean noise power by this much: with some 4000 places to look, noise alone reaches 10 dB about once. */
const ABOVE_NOISE = 10 ** 1.3
/** Below the strongest line by more than this, a peak is quantisation, distortion or the filter's own leak. */
const DYNAMIC_RANGE = 10 ** -5.8
/** Quantile of exponentially distributed noise power taken as its level, and what part of the mean that is: -ln(1 - q). */
const NOISE_QUANTILE = 0.3
const QUANTILE_OF_MEAN = -Math.log(1 - NOISE_QUANTILE)

/**
 * Peaks of the ring that the lines found so far do not explain.
 *
 * Noise level: the 30 % quantile of the power in blocks of 40 Hz, which lines in a block hardly move.
 * @param ring   from the start of the ring
 * @param known  lines to take off first
 * @param most   how many to give at most
 */
export function findCandidates(ring: Float64Array, search: Search, known: DecayingTone[], most: number): SearchResult {
  const rest = ring.slice(0, Math.round(0.7 * search.sampleRateHz))
  subtractFromRing(rest, search.sampleRateHz, known)
  const results = LISTENINGS.map(listening => listen(ring, rest, search, listening, most))
  const [long, short] = results as [SearchResult, SearchResult]
  const fresh = short.candidates.filter(c => !long.candidates.some(other => Math.abs(other.frequencyHz - c.frequencyHz) < 10))
  return { candidates: [...long.candidates, ...fresh].slice(0, most), threshold: long.threshold }
}

function listen(ring: Float64Array, rest: Float64Array, search: Search, listening: Listening, most: number): SearchResult {
  const rate = search.sampleRateHz
  const length = Math.min(rest.length, Math.round(listening.lengthS * rate))
  const window = ringWindow(length, Math.min(Math.round(listening.riseS * rate), length >> 2))
  const whole = spectrumOf(ring.subarray(0, length), rate, window, 2 * length)
  const left = spectrumOf(rest.subarray(0, length), rate, window, 2 * length)
  const power = powerOf(left)
  const flank = new Float64Array(power.length)
  for (let k = 0; k < flank.length; k++) flank[k] = (whole.bins[2 * k]! - left.bins[2 * k]!) ** 2 + (whole.bins[2 * k + 1]! - left.bins[2 * k + 1]!) ** 2
  const strongest = powerOf(whole).reduce((max, p) => Math.max(max, p), 0)
  const threshold = noiseLevel(power, left.stepHz, search).map(level => Math.max(ABOVE_NOISE * level, DYNAMIC_RANGE * strongest))
  const peaks = localPeaks(power, left.stepHz, search)
    .filter(peak => peak.power > threshold[blockOf(peak.frequencyHz, search, threshold.length)]! && peak.power > search.ripple ** 2 * flank[peak.bin]!)
    .sort((a, b) => b.power - a.power)
  const later = laterPower(rest, rate, window, listening.laterS)
  const candidates: PeakCandidate[] = []
  for (const peak of peaks) {
    if (candidates.length >= most) break
    if (candidates.some(c => onFlank(peak, c, 1.5 / listening.lengthS))) continue
    const fall = Math.log(peak.power / Math.max(1e-300, later(peak.bin))) / 2 / listening.laterS
    candidates.push({ frequencyHz: peak.frequencyHz, gammaPerS: Math.max(0.5, Math.min(150, fall)), power: peak.power })
  }
  return { candidates, threshold }
}

/** True inside the width of a stronger candidate, or no higher than its flank: such a peak can wait until that is fitted. */
function onFlank(peak: { frequencyHz: number, power: number }, stronger: PeakCandidate, resolutionHz: number): boolean {
  const halfWidth = Math.max(resolutionHz, stronger.gammaPerS / (2 * Math.PI))
  const widths = Math.abs(peak.frequencyHz - stronger.frequencyHz) / halfWidth
  return widths < 2 || peak.power < stronger.power / widths ** 2
}

/** Power at a bin of the same search made laterS later: how fast each peak falls. */
function laterPower(rest: Float64Array, rate: number, window: Float64Array, laterS: number): (bin: number) => number {
  const shift = Math.min(Math.round(laterS * rate), rest.length >> 1)
  const part = rest.subarray(shift, shift + window.length)
  const power = powerOf(spectrumOf(part, rate, window.subarray(0, part.length), 2 * window.length))
  return bin => power[bin]!
}

function blockOf(frequencyHz: number, search: Search, blocks: number): number {
  return Math.max(0, Math.min(blocks - 1, Math.floor((frequencyHz - search.fromHz) / BLOCK_HZ)))
}

/** A line that air damps hard fills its block and the two beside it: the level is the lower quartile of eleven blocks. */
const NEIGHBOUR_BLOCKS = 5

/** Mean noise power in each block; the lower quartile of exponential noise's estimates lies some 30 % below their mean. */
function noiseLevel(power: Float64Array, stepHz: number, search: Search): Float64Array {
  const blocks = Math.max(1, Math.ceil((search.toHz - search.fromHz) / BLOCK_HZ))
  const raw = new Float64Array(blocks)
  for (let b = 0; b < blocks; b++) {
    const lo = Math.ceil((search.fromHz + b * BLOCK_HZ) / stepHz)
    const part = power.slice(lo, Math.min(power.length, lo + Math.ceil(BLOCK_HZ / stepHz))).sort()
    raw[b] = (part[Math.floor(NOISE_QUANTILE * part.length)] ?? 0) / QUANTILE_OF_MEAN
  }
  return raw.map((_, b) => {
    const near = raw.slice(Math.max(0, b - NEIGHBOUR_BLOCKS), b + NEIGHBOUR_BLOCKS + 1).sort()
    return 1.3 * near[near.length >> 2]!
  })
}

function localPeaks(power: Float64Array, stepHz: number, search: Search) {
  const peaks: { bin: number, frequencyHz: number, power: number }[] = []
  const last = Math.min(power.length - 2, Math.floor(search.toHz / stepHz))
  for (let k = Math.max(1, Math.ceil(search.fromHz / stepHz)); k <= last; k++) {
    const [a, b, c] = [power[k - 1]!, power[k]!, power[k + 1]!]
    if (b <= a || b < c) continue
    // Vertex of the parabola through the three levels: within a twentieth of a bin, enough to start the fit from.
    const [la, lb, lc] = [Math.log(a + 1e-300), Math.log(b), Math.log(c + 1e-300)]
    const shift = (la - lc) / (2 * (la - 2 * lb + lc))
    peaks.push({ bin: k, frequencyHz: (k + shift) * stepHz, power: b })
  }
  return peaks
}
