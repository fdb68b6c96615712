// Bessel functions of whole order. Backward recurrence where it is cheap, Hankel's asymptotic series beyond.

const ASYMPTOTIC_FROM = 25
const RESCALE_ABOVE = 1e200

/** J_0 and J_1 by Hankel's asymptotic series, for x >= 25: the smallest term is below 1e-21. DLMF 10.17.3. */
function asymptotic(order: 0 | 1, x: number): number {
  const mu = 4 * order * order
  let p = 1
  let q = 0
  let term = 1
  for (let k = 1; k <= 60; k++) {
    const factor = (mu - (2 * k - 1) ** 2) / (k * 8 * x)
    const next = term * factor
    if (Math.abs(next) > Math.abs(term) || Math.abs(next) < 1e-18) break
    term = next
    const sign = (k >> 1) % 2 === 0 ? 1 : -1
    if (k % 2 === 0) p += sign * term
    else q += sign * term
  }
  // cos(x - pi/4 - order pi/2) and its sine by sums of cos x and sin x, which lose no digits to the shift.
  const c = Math.cos(x)
  const s = Math.sin(x)
  const cosChi = order === 0 ? (c + s) * Math.SQRT1_2 : (s - c) * Math.SQRT1_2
  const sinChi = order === 0 ? (s - c) * Math.SQRT1_2 : -(s + c) * Math.SQRT1_2
  return Math.sqrt(2 / (Math.PI * x)) * (p * cosChi - q * sinChi)
}

/** Miller's backward recurrence, normalised by J_0 + 2 (J_2 + J_4 + ...) = 1. DLMF 3.6(iii), 10.12.4. */
function backward(highest: number, x: number, out: Float64Array): void {
  const top = Math.max(highest, x)
  let k = 2 * Math.ceil((top + 12 + Math.sqrt(50 * (top + 1))) / 2)
  let above = 0
  let here = 1e-280
  let sum = 0
  for (; k > 0; k--) {
    const below = (2 * k / x) * here - above
    above = here
    here = below
    if (k - 1 <= highest) out[k - 1] = here
    if ((k - 1) % 2 === 0) sum += k === 1 ? here : 2 * here
    if (Math.abs(here) > RESCALE_ABOVE) {
      here /= RESCALE_ABOVE
      above /= RESCALE_ABOVE
      sum /= RESCALE_ABOVE
      for (let j = k - 1; j <= highest; j++) out[j] = out[j]! / RESCALE_ABOVE
    }
  }
  for (let j = 0; j <= highest; j++) out[j] = out[j]! / sum
}

function check(order: number, x: number): void {
  if (!Number.isInteger(order) || order < 0) throw new RangeError(`Bessel order must be a whole number >= 0, not ${order}`)
  if (!Number.isFinite(x) || x < 0) throw new RangeError(`Bessel argument must be finite and >= 0, not ${x}`)
}

/**
 * J_0(x) to J_M(x), Bessel functions of the first kind, dimensionless.
 *
 * Absolute error about 1e-15 for x < 25 and about 1e-16 * x / 25 beyond (the rounding of x itself).
 * Special values: J_0(0) = 1, J_m(0) = 0 for m >= 1.
 * @param highest  M, highest order, whole, >= 0
 * @param x        argument, dimensionless, >= 0
 * @param out      filled from 0 to M; made where left out
 * @throws RangeError when the order or argument is outside its range
 * Source: NIST DLMF sections 3.6(iii), 10.12.4, 10.17.3.
 */
export function besselJUpTo(highest: number, x: number, out: Float64Array = new Float64Array(highest + 1)): Float64Array {
  check(highest, x)
  if (x < 1e-150) {
    out.fill(0, 0, highest + 1)
    out[0] = 1
    if (highest >= 1) out[1] = x / 2
    return out
  }
  if (x < ASYMPTOTIC_FROM || highest > x) {
    backward(highest, x, out)
    return out
  }
  out[0] = asymptotic(0, x)
  if (highest >= 1) out[1] = asymptotic(1, x)
  for (let m = 1; m < highest; m++) out[m + 1] = (2 * m / x) * out[m]! - out[m - 1]!
  return out
}

/**
 * J_m(x), Bessel function of the first kind of whole order, dimensionless.
 *
 * @param m  order, whole, >= 0
 * @param x  argument, dimensionless, >= 0
 * @throws RangeError when the order or argument is outside its range
 * Source: NIST DLMF chapter 10; see besselJUpTo for method and error.
 */
export function besselJ(m: number, x: number): number {
  check(m, x)
  if (x >= ASYMPTOTIC_FROM && m <= 1) return asymptotic(m as 0 | 1, x)
  return besselJUpTo(m, x)[m]!
}

/**
 * J_m'(x), derivative of the Bessel function, dimensionless: J_0' = -J_1; J_m' = (J_(m-1) - J_(m+1)) / 2.
 *
 * @param m  order, whole, >= 0
 * @param x  argument, dimensionless, >= 0
 * @throws RangeError when the order or argument is outside its range
 * Source: NIST DLMF 10.6.1, 10.6.3.
 */
export function besselJPrime(m: number, x: number): number {
  check(m, x)
  if (m === 0) return -besselJ(1, x)
  const j = besselJUpTo(m + 1, x)
  return (j[m - 1]! - j[m + 1]!) / 2
}

/**
 * Spherical Bessel functions j_0(x) to j_P(x), j_p(x) = sqrt(pi / (2x)) J_(p+1/2)(x), dimensionless.
 *
 * Special values: j_0(0) = 1, j_p(0) = 0 for p >= 1.
 * @param highest  P, highest order, whole, >= 0
 * @param x        argument, dimensionless, >= 0
 * @param out      filled from 0 to P; made where left out
 * @throws RangeError when the order or argument is outside its range
 * Source: NIST DLMF 10.47, 10.51.1; backward recurrence scaled to the larger of j_0 = sin x / x and j_1.
 */
export function sphericalBesselUpTo(highest: number, x: number, out: Float64Array = new Float64Array(highest + 1)): Float64Array {
  check(highest, x)
  if (x < 1e-100) {
    out.fill(0, 0, highest + 1)
    out[0] = 1
    return out
  }
  const j0 = Math.sin(x) / x
  const j1 = x < 0.01 ? x / 3 * (1 - x * x / 10 * (1 - x * x / 28)) : (j0 - Math.cos(x)) / x
  if (highest < x) {
    out[0] = j0
    if (highest >= 1) out[1] = j1
    for (let p = 1; p < highest; p++) out[p + 1] = ((2 * p + 1) / x) * out[p]! - out[p - 1]!
    return out
  }
  const top = Math.max(highest, x)
  let above = 0
  let here = 1e-280
  for (let p = Math.ceil(top + 12 + Math.sqrt(50 * (top + 1))); p > 0; p--) {
    const below = ((2 * p + 1) / x) * here - above
    above = here
    here = below
    if (p - 1 <= highest) out[p - 1] = here
    if (Math.abs(here) > RESCALE_ABOVE) {
      here /= RESCALE_ABOVE
      above /= RESCALE_ABOVE
      for (let j = p - 1; j <= highest; j++) out[j] = out[j]! / RESCALE_ABOVE
    }
  }
  const scale = Math.abs(j0) >= Math.abs(j1) ? j0 / here : j1 / above
  for (let p = 0; p <= highest; p++) out[p] = out[p]! * scale
  return out
}
