import { spectrumOf } from '../analysis/spectrum'
import type { LowBand } from '../analysis/decimate'
import { AFTER_ONSET_S } from '../analysis/ring'
import type { Tap } from '../analysis/taps'

/** The ring of every tap of a round, each under the same exponential window from the same moment after its onset. */
export interface RoundSpectra {
  /** Number of taps. */
  taps: number
  /** Bins of the transform lie stepHz apart, from zero. */
  stepHz: number
  /** Real and imaginary parts in turn, one array a tap. */
  spectra: Float64Array[]
  /** Mean |noise|^2 of a bin. */
  noise: number
  /** Window exp(-windowPerS t) over count samples, periodS apart. */
  windowPerS: number
  count: number
  periodS: number
  /** First sample of each tap's ring after the onset that was found, s. */
  delaysS: Float64Array
  /** Highest frequency that is free of aliases, Hz. */
  passHz: number
}

const LONGEST_S = 1.3
const BEFORE_NEXT_S = 0.005
/** The window falls by exp(-3) over the ring: what is cut off at its end is modelled, so it need not be nothing. */
const WINDOW_FALL = 3

/** Cuts and transforms the rings of a round. @param taps in order, at least two */
export function roundSpectra(band: LowBand, taps: Tap[], noisePower: number): RoundSpectra {
  const rate = band.sampleRateHz
  const delay = (band.filterLength - 1) / 2 / (rate * band.factor)
  const starts = taps.map(tap => Math.ceil((tap.lastHitS + AFTER_ONSET_S) * rate + band.filterLength / band.factor))
  const room = Math.min(...taps.map((tap, i) => Math.floor((tap.endS - BEFORE_NEXT_S + delay) * rate) - starts[i]!))
  const count = Math.max(1, Math.min(Math.round(LONGEST_S * rate), room))
  const windowPerS = WINDOW_FALL * rate / count
  const window = Float64Array.from({ length: count }, (_, n) => Math.exp(-windowPerS * n / rate))
  let size = 0
  const spectra = starts.map((start) => {
    const found = spectrumOf(band.samples.subarray(start, start + count), rate, window)
    size = found.size
    return found.bins
  })
  return {
    taps: taps.length,
    stepHz: rate / size,
    spectra,
    noise: noisePower * (1 - Math.exp(-2 * WINDOW_FALL)) / (1 - Math.exp(-2 * windowPerS / rate)),
    windowPerS, count,
    periodS: 1 / rate,
    delaysS: Float64Array.from(starts, (start, i) => start / rate - delay - taps[i]!.lastHitS),
    passHz: band.passHz,
  }
}
