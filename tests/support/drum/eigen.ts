/** Roots of the test drum's frequency-dependent eigenproblem A(w) v = 0, A complex symmetric. */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { add, c, div, mul, scale, solveComplex, sub } from './complex'
import type { Complex, ComplexMatrix } from './complex'

/** Number of negative eigenvalues of a real symmetric matrix: signs of the pivots (Sylvester's law of inertia). */
export function negativeCount(matrix: Float64Array, n: number): number {
  const a = Float64Array.from(matrix)
  let count = 0
  for (let k = 0; k < n; k++) {
    const pivot = a[k * n + k]! || 1e-300
    if (pivot < 0) count++
    for (let i = k + 1; i < n; i++) {
      const f = a[i * n + k]! / pivot
      for (let j = k + 1; j < n; j++) a[i * n + j]! -= f * a[k * n + j]!
    }
  }
  return count
}

/** Brackets each step of the rising count between `low` and `high` to `width`; each hit with its multiplicity. */
export function bracketSteps(count: (x: number) => number, low: number, high: number, width: number): { at: number, times: number }[] {
  const found: { at: number, times: number }[] = []
  const split = (a: number, na: number, b: number, nb: number): void => {
    if (nb <= na) return
    if (b - a < width) {
      found.push({ at: (a + b) / 2, times: nb - na })
      return
    }
    const mid = (a + b) / 2
    const nm = count(mid)
    split(a, na, mid, nm)
    split(mid, nm, b, nb)
  }
  split(low, count(low), high, count(high))
  return found
}

/** Eigenvectors of the `count` eigenvalues nearest zero of a real symmetric matrix. */
export function nearestNull(matrix: Float64Array, n: number, count: number): number[][] {
  const evd = new EigenvalueDecomposition(Matrix.from1DArray(n, n, Array.from(matrix)), { assumeSymmetric: true })
  const order = evd.realEigenvalues.map((value, i) => ({ value: Math.abs(value), i })).sort((a, b) => a.value - b.value)
  return order.slice(0, count).map(({ i }) => evd.eigenvectorMatrix.getColumn(i))
}

/** Bilinear form v^T A w, without conjugation. */
export function bilinear(v: Complex[], a: ComplexMatrix, w: Complex[]): Complex {
  let sum = c(0)
  for (let i = 0; i < a.n; i++) {
    let row = c(0)
    for (let j = 0; j < a.n; j++) row = add(row, mul(c(a.re[i * a.n + j]!, a.im[i * a.n + j]!), w[j]!))
    sum = add(sum, mul(v[i]!, row))
  }
  return sum
}

export interface Root { omega: Complex, v: Complex[], slope: Complex }

/**
 * Newton's method for A(w) v = 0 from a start near a root (Ruhe, SIAM J. Numer. Anal. 10 (1973) 674).
 * `slope` = v^T A'(w) v with v^T v = 1 at the root.
 */
export function refineRoot(at: (omega: Complex) => ComplexMatrix, omega0: number, start: number[]): Root | undefined {
  let omega = c(omega0)
  let v = start.map(value => c(value))
  let slope = c(0)
  for (let pass = 0; pass < 40; pass++) {
    const a = at(omega)
    const step = omega0 * 1e-4
    const up = at(add(omega, c(step)))
    const down = at(add(omega, c(-step)))
    const derivative: ComplexMatrix = {
      n: a.n,
      re: up.re.map((value, i) => (value - down.re[i]!) / (2 * step)),
      im: up.im.map((value, i) => (value - down.im[i]!) / (2 * step)),
    }
    const rhs = v.map((_, i) => {
      let sum = c(0)
      for (let j = 0; j < a.n; j++) sum = add(sum, mul(c(derivative.re[i * a.n + j]!, derivative.im[i * a.n + j]!), v[j]!))
      return sum
    })
    const u = solveComplex(a, rhs)
    const vv = v.reduce((sum, x) => add(sum, mul(x, x)), c(0))
    const vu = v.reduce((sum, x, i) => add(sum, mul(x, u[i]!)), c(0))
    const move = div(vv, vu)
    // A start between two close roots can leap; hold the step to a few percent.
    const size = Math.hypot(move.re, move.im)
    const held = size > 0.03 * omega0 ? scale(move, 0.03 * omega0 / size) : move
    omega = sub(omega, held)
    const norm = u.reduce((sum, x) => add(sum, mul(x, x)), c(0))
    const root = squareRoot(norm)
    v = u.map(x => div(x, root))
    slope = bilinear(v, derivative, v)
    if (size < 1e-10 * omega0) return { omega, v, slope }
  }
  return undefined
}

function squareRoot(a: Complex): Complex {
  const r = Math.sqrt(Math.hypot(a.re, a.im))
  const half = Math.atan2(a.im, a.re) / 2
  return c(r * Math.cos(half), r * Math.sin(half))
}
