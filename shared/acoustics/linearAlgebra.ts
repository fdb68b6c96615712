// Small dense linear algebra, row-major: the matrices here have at most some twenty rows.

/**
 * Solves A x = b for one or more right sides by Gaussian elimination with partial pivoting.
 *
 * A and b are overwritten; b then holds the solution. A pivot of zero is replaced by a tiny number, so that inverse
 * iteration may use a shift that is an eigenvalue to the last digit.
 * All numbers are in whatever units A and b carry. Source: Gaussian elimination (Golub & Van Loan, Matrix Computations, ch. 3).
 * @param size  rows of A
 * @param a     A, row-major, size x size
 * @param b     right sides, row-major, size x columns
 */
export function solveInPlace(size: number, a: Float64Array, b: Float64Array, columns = 1): void {
  for (let c = 0; c < size; c++) {
    let pivot = c
    for (let r = c + 1; r < size; r++) if (Math.abs(a[r * size + c]!) > Math.abs(a[pivot * size + c]!)) pivot = r
    if (pivot !== c) {
      for (let j = c; j < size; j++) {
        const t = a[c * size + j]!
        a[c * size + j] = a[pivot * size + j]!
        a[pivot * size + j] = t
      }
      for (let j = 0; j < columns; j++) {
        const t = b[c * columns + j]!
        b[c * columns + j] = b[pivot * columns + j]!
        b[pivot * columns + j] = t
      }
    }
    const top = a[c * size + c]! === 0 ? 1e-300 : a[c * size + c]!
    a[c * size + c] = top
    for (let r = c + 1; r < size; r++) {
      const factor = a[r * size + c]! / top
      if (factor === 0) continue
      for (let j = c + 1; j < size; j++) a[r * size + j] = a[r * size + j]! - factor * a[c * size + j]!
      for (let j = 0; j < columns; j++) b[r * columns + j] = b[r * columns + j]! - factor * b[c * columns + j]!
    }
  }
  for (let r = size - 1; r >= 0; r--) {
    for (let j = 0; j < columns; j++) {
      let sum = b[r * columns + j]!
      for (let c = r + 1; c < size; c++) sum -= a[r * size + c]! * b[c * columns + j]!
      b[r * columns + j] = sum / a[r * size + r]!
    }
  }
}

/** Householder's reduction to tridiagonal form: a becomes the transform, d the diagonal, e the off-diagonal. */
function tridiagonalise(n: number, a: Float64Array, d: Float64Array, e: Float64Array): void {
  const p = new Float64Array(n)
  const v = new Float64Array(n)
  const q = new Float64Array(n * n)
  for (let i = 0; i < n; i++) q[i * n + i] = 1
  for (let k = 0; k < n - 2; k++) {
    let norm = 0
    for (let i = k + 1; i < n; i++) norm += a[i * n + k]! ** 2
    norm = Math.sqrt(norm)
    if (norm < 1e-300) continue
    const alpha = a[(k + 1) * n + k]! > 0 ? -norm : norm
    let vv = 0
    for (let i = 0; i < n; i++) {
      v[i] = i <= k ? 0 : a[i * n + k]! - (i === k + 1 ? alpha : 0)
      vv += v[i]! ** 2
    }
    if (vv === 0) continue
    let vp = 0
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let j = k + 1; j < n; j++) sum += a[i * n + j]! * v[j]!
      p[i] = 2 * sum / vv
      vp += p[i]! * v[i]!
    }
    for (let i = 0; i < n; i++) p[i] = p[i]! - (vp / vv) * v[i]!
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) a[i * n + j] = a[i * n + j]! - v[i]! * p[j]! - p[i]! * v[j]!
    }
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let j = k + 1; j < n; j++) sum += q[i * n + j]! * v[j]!
      sum *= 2 / vv
      for (let j = k + 1; j < n; j++) q[i * n + j] = q[i * n + j]! - sum * v[j]!
    }
  }
  for (let i = 0; i < n; i++) {
    d[i] = a[i * n + i]!
    e[i] = i + 1 < n ? a[(i + 1) * n + i]! : 0
  }
  a.set(q)
}

/** Implicit QL with Wilkinson's shift on a tridiagonal matrix; columns of z follow. */
function implicitQl(n: number, d: Float64Array, e: Float64Array, z: Float64Array): void {
  for (let l = 0; l < n; l++) {
    for (let round = 0; round < 60; round++) {
      let m = l
      while (m < n - 1 && Math.abs(e[m]!) > 1e-16 * (Math.abs(d[m]!) + Math.abs(d[m + 1]!))) m++
      if (m === l) break
      let g = (d[l + 1]! - d[l]!) / (2 * e[l]!)
      g = d[m]! - d[l]! + e[l]! / (g + (g >= 0 ? 1 : -1) * Math.hypot(g, 1))
      let s = 1
      let c = 1
      let p = 0
      for (let i = m - 1; i >= l; i--) {
        const f = s * e[i]!
        const b = c * e[i]!
        const r = Math.hypot(f, g)
        e[i + 1] = r
        if (r === 0) {
          d[i + 1] = d[i + 1]! - p
          break
        }
        s = f / r
        c = g / r
        g = d[i + 1]! - p
        const t = (d[i]! - g) * s + 2 * c * b
        p = s * t
        d[i + 1] = g + p
        g = c * t - b
        for (let k = 0; k < n; k++) {
          const upper = z[k * n + i + 1]!
          z[k * n + i + 1] = s * z[k * n + i]! + c * upper
          z[k * n + i] = c * z[k * n + i]! - s * upper
        }
      }
      d[l] = d[l]! - p
      e[l] = g
      e[m] = 0
    }
  }
}

export interface GeneralisedEigen {
  /** Eigenvalues, in no order. */
  values: Float64Array
  /** Column i is the i-th eigenvector, row-major, normalised to x^T M x = 1. */
  vectors: Float64Array
}

/**
 * Eigenpairs of the symmetric problem K x = lambda M x, M positive definite, by Cholesky and Householder-QL.
 *
 * @param n  rows
 * @param k  K, row-major; kept
 * @param m  M, row-major; kept
 * @throws RangeError when M is not positive definite
 * Source: Golub & Van Loan, Matrix Computations, sections 8.3 and 8.7.
 */
export function generalisedEigen(n: number, k: Float64Array, m: Float64Array): GeneralisedEigen {
  const l = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = m[i * n + j]!
      for (let q = 0; q < j; q++) sum -= l[i * n + q]! * l[j * n + q]!
      if (i === j) {
        if (!(sum > 0)) throw new RangeError('mass matrix is not positive definite')
        l[i * n + i] = Math.sqrt(sum)
      } else {
        l[i * n + j] = sum / l[j * n + j]!
      }
    }
  }
  // A = L^-1 K L^-T, first rows, then columns.
  const a = Float64Array.from(k)
  for (let c = 0; c < n; c++) {
    for (let i = 0; i < n; i++) {
      let sum = a[i * n + c]!
      for (let q = 0; q < i; q++) sum -= l[i * n + q]! * a[q * n + c]!
      a[i * n + c] = sum / l[i * n + i]!
    }
  }
  for (let r = 0; r < n; r++) {
    for (let i = 0; i < n; i++) {
      let sum = a[r * n + i]!
      for (let q = 0; q < i; q++) sum -= l[i * n + q]! * a[r * n + q]!
      a[r * n + i] = sum / l[i * n + i]!
    }
  }
  const values = new Float64Array(n)
  const off = new Float64Array(n)
  tridiagonalise(n, a, values, off)
  implicitQl(n, values, off, a)
  for (let c = 0; c < n; c++) {
    for (let i = n - 1; i >= 0; i--) {
      let sum = a[i * n + c]!
      for (let q = i + 1; q < n; q++) sum -= l[q * n + i]! * a[q * n + c]!
      a[i * n + c] = sum / l[i * n + i]!
    }
  }
  return { values, vectors: a }
}
