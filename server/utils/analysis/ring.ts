import type { LowBand } from './decimate'
import type { Ring } from './lines'
import type { Tap } from './taps'

/** The contact and its click are over this long after the onset, s. */
export const AFTER_ONSET_S = 0.008
const LONGEST_S = 2.7
const SHORTEST_S = 0.3
const STEP_S = 0.05
/** The next tap's first moments stay out, s: its onset is known to about a millisecond. */
const BEFORE_NEXT_S = 0.005

/** A ring and where it was taken from. */
export interface CutRing extends Ring {
  startS: number
  /** Index of its first sample in the band's. */
  from: number
  /** Length that was there to take, before the quiet end was cut off, s. */
  availableS: number
}

/**
 * Cuts the part of a tap that rings by itself: from 8 ms after its last hit, and one filter length on, to where it sinks
 * into the noise or the next tap comes.
 */
export function cutRing(band: LowBand, tap: Tap): CutRing {
  const rate = band.sampleRateHz
  const inputRate = rate * band.factor
  const start = Math.ceil((tap.lastHitS + AFTER_ONSET_S) * rate + band.filterLength / band.factor)
  const end = Math.min(band.samples.length, Math.floor((tap.endS - BEFORE_NEXT_S) * rate))
  const availableS = Math.max(0, (end - start) / rate)
  const noisePower = noiseOf(band, tap)
  const step = Math.round(STEP_S * rate)
  const longest = Math.min(end, start + Math.round(LONGEST_S * rate))
  let stop = Math.min(longest, start + Math.round(SHORTEST_S * rate))
  while (stop + step <= longest && meanPower(band.samples, stop, stop + step) > 1.3 * noisePower) stop += step
  if (stop + step > longest) stop = Math.max(stop, longest)
  return {
    samples: band.samples.slice(start, Math.max(start, stop)),
    sampleRateHz: rate,
    passHz: band.passHz,
    noisePower,
    sinceS: start / rate - (band.filterLength - 1) / 2 / inputRate - tap.lastHitS,
    from: start,
    startS: start / rate - (band.filterLength - 1) / 2 / inputRate,
    availableS,
  }
}

/**
 * Mean square of the noise: the quietest of the fifth of a second before the tap, the tenth before its ring ends, and the
 * quietest twentieth of a second of the whole recording times two (a dense recording has no quiet beside its taps).
 */
function noiseOf(band: LowBand, tap: Tap): number {
  const rate = band.sampleRateHz
  const onset = Math.floor(tap.atS * rate) - Math.round(0.005 * rate)
  const before = onset > 0.05 * rate ? meanPower(band.samples, Math.max(0, onset - Math.round(0.2 * rate)), onset) : Infinity
  const end = Math.min(band.samples.length, Math.floor((tap.endS - BEFORE_NEXT_S) * rate))
  const tail = meanPower(band.samples, Math.max(0, end - Math.round(0.1 * rate)), end)
  const step = Math.round(STEP_S * rate)
  let quietest = Infinity
  for (let n = step; n + step <= band.samples.length; n += step) quietest = Math.min(quietest, meanPower(band.samples, n, n + step))
  return Math.min(before, tail, 2 * quietest)
}

/** Mean square of samples from … to - 1 (indices), in units of full scale squared; 0 for none. */
export function meanPower(samples: Float64Array, from: number, to: number): number {
  let sum = 0
  for (let n = from; n < to; n++) sum += samples[n]! ** 2
  return to > from ? sum / (to - from) : 0
}
