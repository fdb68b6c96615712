import FFT from 'fft.js'

interface Plan {
  realTransform(out: Float64Array, data: Float64Array): void
}
// The package's types are `any`; this is all that is used of it.
const createPlan = (size: number) => new (FFT as unknown as new (size: number) => Plan)(size)

// Building a plan costs more than running it (20 ms against 4 at 2^17). A worker sees a handful of sizes in its life.
const plans = new Map<number, Plan>()

/** Complex spectrum of a real signal, interleaved re, im, bins 0 to size / 2. */
export interface ComplexSpectrum {
  /** Transform length, a power of two. */
  size: number
  /** Bin spacing, Hz. */
  stepHz: number
  /** Interleaved real and imaginary parts; bin k at 2k and 2k + 1; only k = 0 … size / 2 are meaningful. */
  bins: Float64Array
}

/** Smallest power of two that is at least n; n >= 1. */
export function powerOfTwoAtLeast(n: number): number {
  let size = 2
  while (size < n) size *= 2
  return size
}

/**
 * Fourier transform of a real signal, zero-padded to a power of two.
 *
 *   X[k] = sum over n of x[n] w[n] exp(-2 pi i k n / size)
 *
 * @param samples       x, any unit
 * @param sampleRateHz  Hz, > 0
 * @param window        w, same length as x; none = all ones
 * @param minSize       the transform is at least this long
 */
export function spectrumOf(samples: ArrayLike<number>, sampleRateHz: number, window?: Float64Array, minSize = 0): ComplexSpectrum {
  const size = powerOfTwoAtLeast(Math.max(samples.length, minSize))
  let plan = plans.get(size)
  if (!plan) {
    plan = createPlan(size)
    plans.set(size, plan)
  }
  const input = new Float64Array(size)
  if (window) for (let n = 0; n < samples.length; n++) input[n] = samples[n]! * window[n]!
  else input.set(samples)
  const bins = new Float64Array(2 * size)
  plan.realTransform(bins, input)
  return { size, stepHz: sampleRateHz / size, bins }
}

/** |X[k]|^2 for bins 0 to size / 2. */
export function powerOf(spectrum: ComplexSpectrum): Float64Array {
  const power = new Float64Array(spectrum.size / 2 + 1)
  for (let k = 0; k < power.length; k++) power[k] = spectrum.bins[2 * k]! ** 2 + spectrum.bins[2 * k + 1]! ** 2
  return power
}

/**
 * Hann window, DFT-even: w[n] = (1 - cos(2 pi n / N)) / 2, n = 0 … N - 1.
 *
 * Noise bandwidth 1.50 bins, scalloping loss 1.42 dB, highest side lobe -32 dB.
 * Source: Harris, Proc. IEEE 66 (1978) 51, table 1.
 */
export function hann(length: number): Float64Array {
  const w = new Float64Array(length)
  for (let n = 0; n < length; n++) w[n] = 0.5 - 0.5 * Math.cos(2 * Math.PI * n / length)
  return w
}

/**
 * Window for a ring that starts loud and dies: half a Hann rise over riseLength samples, then half a Hann fall to the end.
 *
 * A whole Hann window stands highest where a decaying line has half gone; a rectangular one hides weak lines under the
 * skirts of strong ones. This keeps the loud start and still falls off fast.
 * @param length      samples, > riseLength
 * @param riseLength  samples, >= 0
 */
export function ringWindow(length: number, riseLength: number): Float64Array {
  const w = new Float64Array(length)
  for (let n = 0; n < riseLength; n++) w[n] = 0.5 - 0.5 * Math.cos(Math.PI * (n + 0.5) / riseLength)
  const fall = length - riseLength
  for (let n = 0; n < fall; n++) w[riseLength + n] = 0.5 + 0.5 * Math.cos(Math.PI * (n + 0.5) / fall)
  return w
}

/** Equivalent noise bandwidth of a window in bins of its own length: N sum w^2 / (sum w)^2. Source: Harris 1978, eq. 11. */
export function noiseBandwidthBins(window: Float64Array): number {
  let sum = 0
  let squares = 0
  for (const w of window) {
    sum += w
    squares += w * w
  }
  return window.length * squares / sum ** 2
}
