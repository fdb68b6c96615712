/** Taps of the interpolation to either side, samples, and its window's shape: errors below -80 dB up to 0.4 of the rate. */
export const REACH = 20
const KAISER_BETA = 9
const TABLE_STEPS = 512

/** Part of a rise of pitch: share exp(-ratePerS t), t from where listening began. */
export interface Rise { share: number, ratePerS: number }

/**
 * Plays a ring at such a speed that a pitch which falls back to rest stands at rest throughout.
 *
 * All modes of a stretched film stand above rest by the same share, so one stretch of the time axis serves all lines:
 * the sample for the time tau at rest is taken at t where t + sum share (1 - exp(-rate t)) / rate = tau. Band-limited
 * interpolation by a Kaiser-windowed sinc.
 * @param source   samples that begin REACH before the ring or earlier, else the first few are less exact
 * @param from     index where listening began
 * @param count    samples to give
 * @param rises    parts of the rise, which add up
 */
export function unbend(source: Float64Array, from: number, count: number, sampleRateHz: number, rises: Rise[]): Float64Array {
  const out = new Float64Array(count)
  for (let n = 0; n < count; n++) out[n] = interpolate(source, from + sampleRateHz * timeOf(n / sampleRateHz, rises))
  return out
}

/** Solves t + sum share (1 - exp(-rate t)) / rate = tau by a few steps of a fixed point, which shrinks by the share each time. */
function timeOf(tau: number, rises: Rise[]): number {
  let t = tau
  for (let i = 0; i < 8; i++) {
    let ahead = 0
    for (const { share, ratePerS } of rises) ahead += share * (1 - Math.exp(-ratePerS * t)) / ratePerS
    const next = tau - ahead
    if (Math.abs(next - t) < 1e-10) return next
    t = next
  }
  return t
}

function interpolate(source: Float64Array, at: number): number {
  const whole = Math.floor(at)
  const part = at - whole
  if (part < 1e-9) return source[whole] ?? 0
  const sine = Math.sin(Math.PI * part) / Math.PI
  let sum = 0
  for (let j = 1 - REACH; j <= REACH; j++) {
    const sample = source[whole + j]
    if (sample === undefined) continue
    const x = part - j
    sum += (j & 1 ? -sample : sample) * window[Math.round(Math.abs(x) * TABLE_STEPS)]! / x
  }
  return sum * sine
}

/** Kaiser's window over 0 … REACH. */
const window = Float64Array.from({ length: REACH * TABLE_STEPS + 2 }, (_, i) => bessel0(KAISER_BETA * Math.sqrt(Math.max(0, 1 - (i / TABLE_STEPS / REACH) ** 2))) / bessel0(KAISER_BETA))

/** Modified Bessel function I0 by its power series. */
function bessel0(x: number): number {
  let term = 1
  let sum = 1
  for (let k = 1; term > 1e-12 * sum; k++) {
    term *= (x / 2 / k) ** 2
    sum += term
  }
  return sum
}
