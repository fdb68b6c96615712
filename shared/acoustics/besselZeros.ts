import { besselJUpTo } from './bessel'

type Kind = 'value' | 'slope'

const cache: Record<Kind, number[][]> = { value: [], slope: [] }

/** The function whose zero is wanted and its derivative: J_m, or J_m' with J_m'' from Bessel's equation. */
function evaluate(kind: Kind, m: number, x: number): { f: number, slope: number } {
  const j = besselJUpTo(m + 1, x)
  const prime = m === 0 ? -j[1]! : (j[m - 1]! - j[m + 1]!) / 2
  if (kind === 'value') return { f: j[m]!, slope: prime }
  return { f: prime, slope: -prime / x - (1 - (m * m) / (x * x)) * j[m]! }
}

/** Newton's method kept inside a bracket that a change of sign has found. */
function polish(kind: Kind, m: number, from: number, to: number): number {
  let low = from
  let high = to
  const signLow = Math.sign(evaluate(kind, m, low).f)
  let x = (low + high) / 2
  for (let i = 0; i < 80; i++) {
    const { f, slope } = evaluate(kind, m, x)
    if (Math.sign(f) === signLow) low = x
    else high = x
    const step = x - f / slope
    const next = step > low && step < high ? step : (low + high) / 2
    if (Math.abs(next - x) < 1e-15 * x) return next
    x = next
  }
  return x
}

/** Zeros lie more than 2 apart (DLMF 10.21(ii)), so steps of 0.5 from below the first one miss none. */
function zerosUpTo(kind: Kind, m: number, count: number): number[] {
  const known = cache[kind][m] ?? (cache[kind][m] = [])
  const step = 0.5
  let x = known.length > 0 ? known[known.length - 1]! + 1e-6 : Math.max(m, 0.1)
  let f = evaluate(kind, m, x).f
  while (known.length < count) {
    const next = evaluate(kind, m, x + step).f
    if (Math.sign(next) !== Math.sign(f)) {
      const zero = polish(kind, m, x, x + step)
      known.push(zero)
      x = zero + 1e-6
      f = evaluate(kind, m, x).f
    } else {
      x += step
      f = next
    }
  }
  return known
}

function check(m: number, n: number): void {
  if (!Number.isInteger(m) || m < 0) throw new RangeError(`order must be a whole number >= 0, not ${m}`)
  if (!Number.isInteger(n) || n < 1) throw new RangeError(`zero must be numbered from 1, not ${n}`)
}

/**
 * alpha_mn, the n-th positive zero of J_m, dimensionless.
 *
 * @param m  order = nodal diameters, whole, >= 0
 * @param n  number of the zero = nodal circles, whole, >= 1
 * @throws RangeError when m or n is outside its range
 * Source: NIST DLMF 10.21; Abramowitz & Stegun, table 9.5.
 */
export function besselZero(m: number, n: number): number {
  check(m, n)
  return zerosUpTo('value', m, n)[n - 1]!
}

/**
 * b_mq, the q-th positive zero of J_m', dimensionless: the cross modes of a rigid-walled tube.
 *
 * The zero of J_0' at x = 0 (the plane wave) is not counted.
 * @param m  order, whole, >= 0
 * @param q  number of the zero, whole, >= 1
 * @throws RangeError when m or q is outside its range
 * Source: NIST DLMF 10.21; Abramowitz & Stegun, table 9.5 (whose J_0' list counts x = 0 as its first).
 */
export function besselPrimeZero(m: number, q: number): number {
  check(m, q)
  return zerosUpTo('slope', m, q)[q - 1]!
}
