import type { PriorKind } from './matchingNuisance'

/** One equation of the fit: gradient . step = residual, with its standard error. */
export interface FitRow {
  source: { kind: 'mode', noise: number, modelError: number, uneven: number } | { kind: PriorKind }
  gradient: number[]
  residual: number
  error: number
}

export interface FitSolution {
  step: number[]
  /** Row-major. */
  covariance: number[]
  lnDeterminant: number
  /** What a change of each row's left side does to the first unknown: d step_0 / d residual_row. */
  gains: number[]
}

/** A trace of a prior on every unknown, so that one line alone does not make the equations singular. */
const LEAST_INFORMATION = 1e-6

/**
 * Weighted least squares by the normal equations: ten unknowns, some thirty rows.
 *
 *   C = (G^T W G)^-1,  step = C G^T W r,  gain of row i on unknown 0 = (C G^T)_0i W_i
 *
 * Source: JCGM 102:2011; any text on least squares.
 */
export function solveWeighted(rows: FitRow[]): FitSolution {
  const size = rows[0]!.gradient.length
  const information = new Float64Array(size * size)
  const right = new Float64Array(size)
  for (const { gradient, residual, error } of rows) {
    const weight = 1 / (error * error)
    for (let i = 0; i < size; i++) {
      if (gradient[i] === 0) continue
      right[i] = right[i]! + weight * gradient[i]! * residual
      for (let j = 0; j < size; j++) information[i * size + j] = information[i * size + j]! + weight * gradient[i]! * gradient[j]!
    }
  }
  for (let i = 0; i < size; i++) information[i * size + i] = information[i * size + i]! + LEAST_INFORMATION
  const { inverse, lnDeterminant } = invertPositive(size, information)
  const step = Array.from({ length: size }, (_, i) => right.reduce((sum, value, j) => sum + inverse[i * size + j]! * value, 0))
  const covariance = Array.from(inverse)
  return { step, covariance, lnDeterminant: -lnDeterminant, gains: gainsOn(0, rows, covariance) }
}

/** What a change of each row's left side does to one unknown: d step_column / d residual_row. */
export function gainsOn(column: number, rows: FitRow[], covariance: number[]): number[] {
  const size = rows[0]!.gradient.length
  return rows.map(({ gradient, error }) => gradient.reduce((sum, g, j) => sum + covariance[column * size + j]! * g, 0) / (error * error))
}

/** Inverse and ln of the determinant of a symmetric positive definite matrix, by Gauss-Jordan without pivoting. */
function invertPositive(size: number, matrix: Float64Array): { inverse: Float64Array, lnDeterminant: number } {
  const a = Float64Array.from(matrix)
  const b = new Float64Array(size * size)
  for (let i = 0; i < size; i++) b[i * size + i] = 1
  let lnDeterminant = 0
  for (let c = 0; c < size; c++) {
    const pivot = a[c * size + c]!
    lnDeterminant += Math.log(pivot)
    for (let j = 0; j < size; j++) {
      a[c * size + j] = a[c * size + j]! / pivot
      b[c * size + j] = b[c * size + j]! / pivot
    }
    for (let r = 0; r < size; r++) {
      const factor = a[r * size + c]!
      if (r === c || factor === 0) continue
      for (let j = 0; j < size; j++) {
        a[r * size + j] = a[r * size + j]! - factor * a[c * size + j]!
        b[r * size + j] = b[r * size + j]! - factor * b[c * size + j]!
      }
    }
  }
  return { inverse: b, lnDeterminant }
}
