/**
 * Solves (M + damping diag M) x = b by Cholesky on the matrix scaled to a unit diagonal; undefined where M is not positive
 * definite.
 * @param matrix   symmetric, size x size, row by row
 * @param damping  0 or more
 */
export function solveSymmetric(matrix: Float64Array, b: Float64Array, damping: number): Float64Array | undefined {
  const size = b.length
  const factor = cholesky(matrix, size, damping)
  return factor ? backSubstitute(factor, b, size) : undefined
}

/** Inverse of a symmetric positive definite matrix of size rows, row by row, in the inverse of its unit; undefined where it is not. */
export function invertSymmetric(matrix: Float64Array, size: number): Float64Array | undefined {
  const factor = cholesky(matrix, size, 0)
  if (!factor) return undefined
  const inverse = new Float64Array(size * size)
  const unit = new Float64Array(size)
  for (let i = 0; i < size; i++) {
    unit.fill(0)
    unit[i] = 1
    inverse.set(backSubstitute(factor, unit, size), i * size)
  }
  return inverse
}

interface Factor { lower: Float64Array, scale: Float64Array }

function cholesky(matrix: Float64Array, size: number, damping: number): Factor | undefined {
  const scale = new Float64Array(size)
  for (let i = 0; i < size; i++) scale[i] = 1 / Math.sqrt(matrix[i * size + i]! || 1e-300)
  const lower = new Float64Array(size * size)
  for (let i = 0; i < size; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * size + j]! * scale[i]! * scale[j]! + (i === j ? damping : 0)
      for (let k = 0; k < j; k++) sum -= lower[i * size + k]! * lower[j * size + k]!
      if (i === j) {
        if (!(sum > 1e-13)) return undefined
        lower[i * size + i] = Math.sqrt(sum)
      } else lower[i * size + j] = sum / lower[j * size + j]!
    }
  }
  return { lower, scale }
}

function backSubstitute({ lower, scale }: Factor, b: Float64Array, size: number): Float64Array {
  const x = new Float64Array(size)
  for (let i = 0; i < size; i++) {
    let sum = b[i]! * scale[i]!
    for (let k = 0; k < i; k++) sum -= lower[i * size + k]! * x[k]!
    x[i] = sum / lower[i * size + i]!
  }
  for (let i = size - 1; i >= 0; i--) {
    let sum = x[i]!
    for (let k = i + 1; k < size; k++) sum -= lower[k * size + i]! * x[k]!
    x[i] = sum / lower[i * size + i]!
  }
  return x.map((v, i) => v * scale[i]!)
}
