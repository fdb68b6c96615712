/**
 * Bessel functions of the test drum, on their own: nothing here is shared with the product.
 * Integer orders by Miller's downward recurrence (Abramowitz & Stegun 9.12), spherical ones alike (10.5),
 * zeros by scan and bisection.
 */

/** J_0(x) … J_mMax(x), x >= 0, into `out` (length at least mMax + 1). */
export function besselJ(mMax: number, x: number, out: Float64Array): Float64Array {
  if (x < 1e-12) {
    out.fill(0)
    out[0] = 1
    return out
  }
  const top = Math.max(mMax, x)
  const start = 2 * Math.ceil((top + 14 + 6 * Math.cbrt(top)) / 2)
  let upper = 0
  let here = 1e-280
  let sum = 0
  for (let k = start; k > 0; k--) {
    if (k <= mMax) out[k] = here
    if (k % 2 === 0) sum += 2 * here
    const below = (2 * k / x) * here - upper
    upper = here
    here = below
    if (Math.abs(here) > 1e200) {
      here *= 1e-250
      upper *= 1e-250
      sum *= 1e-250
      for (let j = k; j <= mMax; j++) out[j]! *= 1e-250
    }
  }
  out[0] = here
  sum += here
  for (let j = 0; j <= mMax; j++) out[j]! /= sum
  return out
}

/** Spherical j_0(x) … j_aMax(x), x >= 0, into `out`. */
export function sphericalJ(aMax: number, x: number, out: Float64Array): Float64Array {
  if (x < 1e-12) {
    out.fill(0)
    out[0] = 1
    return out
  }
  const top = Math.max(aMax, x)
  let upper = 0
  let here = 1e-280
  for (let k = Math.ceil(top + 14 + 6 * Math.cbrt(top)); k > 0; k--) {
    if (k <= aMax) out[k] = here
    const below = ((2 * k + 1) / x) * here - upper
    upper = here
    here = below
    if (Math.abs(here) > 1e200) {
      here *= 1e-250
      upper *= 1e-250
      for (let j = k; j <= aMax; j++) out[j]! *= 1e-250
    }
  }
  out[0] = here
  // One of j_0 and j_1 is well away from zero; scale by the larger.
  const j0 = Math.sin(x) / x
  const j1 = x < 0.05 ? x / 3 * (1 - x * x / 10) : (Math.sin(x) / x - Math.cos(x)) / x
  const scale = aMax > 0 && Math.abs(j1) > Math.abs(j0) ? j1 / out[1]! : j0 / out[0]!
  for (let j = 0; j <= aMax; j++) out[j]! *= scale
  return out
}

const scratch = new Float64Array(64)

/** One value J_m(x), x >= 0. */
export function jm(m: number, x: number): number {
  return besselJ(m + 1, x, scratch)[m]!
}

/** Derivative J_m'(x), x >= 0. */
export function jmPrime(m: number, x: number): number {
  besselJ(m + 1, x, scratch)
  return m === 0 ? -scratch[1]! : (scratch[m - 1]! - scratch[m + 1]!) / 2
}

function zerosOf(f: (x: number) => number, from: number, count: number): number[] {
  const zeros: number[] = []
  const step = 0.1
  let a = from
  let fa = f(a)
  while (zeros.length < count) {
    const b = a + step
    const fb = f(b)
    if (fa * fb < 0) {
      let [low, high] = [a, b]
      for (let i = 0; i < 60; i++) {
        const mid = (low + high) / 2
        if (fa * f(mid) > 0) low = mid
        else high = mid
      }
      zeros.push((low + high) / 2)
    }
    a = b
    fa = fb
  }
  return zeros
}

/** The first `count` positive zeros of J_m. */
export function zerosOfJ(m: number, count: number): number[] {
  return zerosOf(x => jm(m, x), 0.5 + m * 0.9, count)
}

/** The first `count` positive zeros of J_m' (for m = 0 the zero at the origin is left out). */
export function zerosOfJPrime(m: number, count: number): number[] {
  return zerosOf(x => jmPrime(m, x), m === 0 ? 0.5 : 0.5 + (m - 1) * 0.9, count)
}
