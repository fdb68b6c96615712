/** A signal at a lower rate, made by a filter that never looks ahead. */
export interface LowBand {
  sampleRateHz: number
  samples: Float64Array
  /** Input samples per output sample. */
  factor: number
  /** Length of the filter in input samples: output k holds input k * factor - filterLength + 1 … k * factor. */
  filterLength: number
  /** Highest frequency that passes flat and free of aliases, Hz. */
  passHz: number
}

/** Lowest rate worth keeping, Hz: heads' modes that carry tension lie below 4 kHz. */
const MIN_RATE_HZ = 11_000
const STOPBAND_DB = 70

/**
 * Keeps the band that holds a head's modes, up to 0.4 of the new rate.
 *
 * The filter is causal: a filter that runs both ways would smear the tap's onset back into the quiet before it.
 * Kaiser-windowed sinc, length (A - 7.95) / (14.36 df), beta = 0.1102 (A - 8.7), A = 70 dB, df = transition / rate.
 * Source: Kaiser, in Kuo & Kaiser (eds.), System Analysis by Digital Computer, Wiley 1966, ch. 7.
 * @param samples       at sampleRateHz
 * @param sampleRateHz  Hz, 8000 to 192 000
 */
export function toLowBand(samples: Float32Array | Float64Array, sampleRateHz: number): LowBand {
  const factor = Math.max(1, Math.floor(sampleRateHz / MIN_RATE_HZ))
  if (factor === 1) return { sampleRateHz, samples: Float64Array.from(samples), factor, filterLength: 1, passHz: 0.45 * sampleRateHz }
  const h = kaiserLowPass(0.5 / factor, 0.2 / factor)
  const length = h.length
  const out = new Float64Array(Math.floor((samples.length - 1) / factor) + 1)
  for (let k = 0; k < out.length; k++) {
    const newest = k * factor
    const taps = Math.min(length, newest + 1)
    let sum = 0
    for (let j = 0; j < taps; j++) sum += h[j]! * samples[newest - j]!
    out[k] = sum
  }
  const rate = sampleRateHz / factor
  return { sampleRateHz: rate, samples: out, factor, filterLength: length, passHz: 0.4 * rate }
}

/** Low pass with cutoff and transition width in cycles per sample, unit gain at zero frequency. */
function kaiserLowPass(cutoff: number, transition: number): Float64Array {
  const half = Math.ceil((STOPBAND_DB - 7.95) / (14.36 * transition) / 2)
  const beta = 0.1102 * (STOPBAND_DB - 8.7)
  const h = new Float64Array(2 * half + 1)
  let sum = 0
  for (let i = 0; i < h.length; i++) {
    const t = i - half
    const ideal = t === 0 ? 2 * cutoff : Math.sin(2 * Math.PI * cutoff * t) / (Math.PI * t)
    h[i] = ideal * besselI0(beta * Math.sqrt(1 - (t / half) ** 2))
    sum += h[i]!
  }
  return h.map(v => v / sum)
}

/** Modified Bessel function I0 by its power series, x >= 0. Source: Abramowitz & Stegun 9.6.10. */
function besselI0(x: number): number {
  let term = 1
  let sum = 1
  for (let k = 1; term > 1e-12 * sum; k++) {
    term *= (x / 2 / k) ** 2
    sum += term
  }
  return sum
}
