/** Small complex arithmetic and a dense complex solver for the test drum. Time runs as exp(-i w t). */

export interface Complex { re: number, im: number }

export const c = (re: number, im = 0): Complex => ({ re, im })
export const add = (a: Complex, b: Complex): Complex => c(a.re + b.re, a.im + b.im)
export const sub = (a: Complex, b: Complex): Complex => c(a.re - b.re, a.im - b.im)
export const mul = (a: Complex, b: Complex): Complex => c(a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re)
export const scale = (a: Complex, s: number): Complex => c(a.re * s, a.im * s)

export function div(a: Complex, b: Complex): Complex {
  const d = b.re * b.re + b.im * b.im
  return c((a.re * b.re + a.im * b.im) / d, (a.im * b.re - a.re * b.im) / d)
}

export function sqrt(a: Complex): Complex {
  const r = Math.hypot(a.re, a.im)
  const re = Math.sqrt(Math.max(0, (r + a.re) / 2))
  const im = Math.sqrt(Math.max(0, (r - a.re) / 2))
  return c(re, a.im < 0 ? -im : im)
}

export const exp = (a: Complex): Complex => scale(c(Math.cos(a.im), Math.sin(a.im)), Math.exp(a.re))

/** Natural logarithm, principal branch. */
export const log = (a: Complex): Complex => c(Math.log(Math.hypot(a.re, a.im)), Math.atan2(a.im, a.re))

/** A dense complex matrix, row by row. */
export interface ComplexMatrix { n: number, re: Float64Array, im: Float64Array }

export const complexMatrix = (n: number): ComplexMatrix => ({ n, re: new Float64Array(n * n), im: new Float64Array(n * n) })

/** Solves A x = b by elimination with row exchange; A and b are left as they are. */
export function solveComplex(a: ComplexMatrix, b: Complex[]): Complex[] {
  const n = a.n
  const rows = Array.from({ length: n }, (_, i) =>
    [...Array.from({ length: n }, (_unused, j) => c(a.re[i * n + j]!, a.im[i * n + j]!)), b[i]!])
  for (let k = 0; k < n; k++) {
    let best = k
    for (let i = k + 1; i < n; i++) {
      if (size(rows[i]![k]!) > size(rows[best]![k]!)) best = i
    }
    [rows[k], rows[best]] = [rows[best]!, rows[k]!]
    for (let i = k + 1; i < n; i++) {
      const f = div(rows[i]![k]!, rows[k]![k]!)
      if (f.re === 0 && f.im === 0) continue
      for (let j = k; j <= n; j++) rows[i]![j] = sub(rows[i]![j]!, mul(f, rows[k]![j]!))
    }
  }
  const x: Complex[] = new Array<Complex>(n)
  for (let i = n - 1; i >= 0; i--) {
    let sum = rows[i]![n]!
    for (let j = i + 1; j < n; j++) sum = sub(sum, mul(rows[i]![j]!, x[j]!))
    x[i] = div(sum, rows[i]![i]!)
  }
  return x
}

const size = (a: Complex): number => Math.abs(a.re) + Math.abs(a.im)
