import type { LowBand } from './decimate'

export interface Tap {
  /** Onset, s from the start of the recording. */
  atS: number
  /** Last onset that belongs to this tap, s: later than atS when the stick or finger bounced. */
  lastHitS: number
  /** Where its ring ends: the next tap or the end of the recording, s. */
  endS: number
  /** Mean power of the loudest 5 ms, and of the moments before the onset (undefined when the recording starts with the tap). */
  peakPower: number
  beforePower: number | undefined
  doubled: boolean
}

/** Two onsets closer than this are one tap that bounced, s. */
const BOUNCE_S = 0.12
/** A tap stands out of the 30 ms before it by this power ratio: beats and room tails of a ring rise far slower. */
const RISE = 5
/** Softer than the loudest tap by more than this power ratio: a touch, not a tap. */
const SOFTEST = 10 ** -2.6
const ABOVE_FLOOR = 8
const FRAME_MS = 1
const WINDOW_FRAMES = 5
const PAST_FRAMES = 30

/**
 * Finds the taps of a recording: sudden rises of energy in the low band, each traced back to where it leaves the floor.
 *
 * A recording that is already ringing at its first sample and only falls from there counts as a tap at 0 s.
 */
export function findTaps(band: LowBand): Tap[] {
  const frame = Math.max(1, Math.round(band.sampleRateHz * FRAME_MS / 1000))
  const energy = slidingPower(band.samples, frame)
  if (energy.length < 2 * WINDOW_FRAMES) return []
  const floor = quantile(energy, 0.15)
  const loudest = energy.reduce((max, e) => Math.max(max, e), 0)
  const onsets: { sample: number, peak: number, before: number | undefined }[] = []
  if (startsRinging(energy, floor, loudest)) onsets.push({ sample: 0, peak: maxOf(energy, 0, 40), before: undefined })
  let armed = true
  for (let i = WINDOW_FRAMES + 1; i < energy.length; i++) {
    const past = maxOf(energy, i - PAST_FRAMES, i - WINDOW_FRAMES)
    const e = energy[i]!
    const rises = e > RISE * past && e > SOFTEST * loudest
    if (rises && armed) {
      const peak = maxOf(energy, i, i + 20)
      onsets.push({ sample: traceBack(band, i * frame, frame, past), peak, before: meanOf(energy, i - PAST_FRAMES, i - WINDOW_FRAMES) })
    }
    armed = !rises
  }
  return group(onsets, band)
}

function group(onsets: { sample: number, peak: number, before: number | undefined }[], band: LowBand): Tap[] {
  const toS = (sample: number) => Math.max(0, (sample * band.factor - (band.filterLength - 1) / 2) / (band.sampleRateHz * band.factor))
  const taps: Tap[] = []
  const endS = band.samples.length / band.sampleRateHz
  for (const onset of onsets) {
    const atS = toS(onset.sample)
    const last = taps.at(-1)
    if (last && atS - last.lastHitS < BOUNCE_S) {
      // Within 15 ms it is one contact seen twice, not a second one.
      if (atS - last.atS > 0.015) last.doubled = true
      last.lastHitS = atS
      last.peakPower = Math.max(last.peakPower, onset.peak)
      continue
    }
    if (last) last.endS = atS
    taps.push({ atS, lastHitS: atS, endS, peakPower: onset.peak, beforePower: onset.before, doubled: false })
  }
  return taps
}

/** Power averaged over 5 frames that start at frame i. */
function slidingPower(samples: Float64Array, frame: number): Float64Array {
  const frames = Math.floor(samples.length / frame)
  const single = new Float64Array(frames)
  for (let i = 0; i < frames; i++) {
    let sum = 0
    for (let n = i * frame; n < (i + 1) * frame; n++) sum += samples[n]! ** 2
    single[i] = sum / frame
  }
  const out = new Float64Array(Math.max(0, frames - WINDOW_FRAMES + 1))
  for (let i = 0; i < out.length; i++) out[i] = meanOf(single, i, i + WINDOW_FRAMES)
  return out
}

/** First sample, searched from the frame that rose, whose short power leaves the floor for good. */
function traceBack(band: LowBand, from: number, frame: number, past: number): number {
  const short = Math.max(1, Math.round(frame / 2))
  const x = band.samples
  const powerAt = (n: number) => {
    let sum = 0
    for (let j = n; j < n + short; j++) sum += (x[j] ?? 0) ** 2
    return sum / short
  }
  const end = Math.min(x.length - short, from + 2 * WINDOW_FRAMES * frame)
  let top = 0
  for (let n = from; n < end; n += short) top = Math.max(top, powerAt(n))
  const threshold = Math.max(3 * past, 1e-4 * top)
  let n = from
  while (n < end && powerAt(n) < Math.max(0.05 * top, threshold)) n++
  while (n > 0 && n > from - WINDOW_FRAMES * frame && powerAt(n) > threshold) n--
  return n
}

/** True where the first moments are already loud, are no louder a little later, and the recording falls well below them. */
function startsRinging(energy: Float64Array, floor: number, loudest: number): boolean {
  const first = maxOf(energy, 0, 25)
  const later = maxOf(energy, 60, 120)
  const settled = meanOf(energy, Math.min(250, Math.max(0, energy.length - 60)), Math.min(310, energy.length))
  return first > ABOVE_FLOOR * floor && first > 0.05 * loudest && later <= first && settled < first / 2
    && energy[0]! > 0.1 * first
}

function maxOf(a: Float64Array, from: number, to: number): number {
  let max = 0
  for (let i = Math.max(0, from); i < Math.min(a.length, to); i++) if (a[i]! > max) max = a[i]!
  return max
}

function meanOf(a: Float64Array, from: number, to: number): number {
  let sum = 0
  const lo = Math.max(0, from)
  const hi = Math.min(a.length, to)
  for (let i = lo; i < hi; i++) sum += a[i]!
  return sum / Math.max(1, hi - lo)
}

function quantile(values: Float64Array, q: number): number {
  const sorted = Float64Array.from(values).sort()
  return sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))] ?? 0
}
