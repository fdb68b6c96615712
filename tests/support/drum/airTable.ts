/**
 * Air-load matrices of the test drum as functions of kappa = k0 R, tabulated by the caller's own full integral and
 * read by six-point Lagrange interpolation, which also continues them a little way into the complex plane
 * (a decaying mode has a complex frequency).
 */
import type { Complex, ComplexMatrix } from './complex'

export const KAPPA_STEP = 0.1
export const KAPPA_MAX = 9
/** Shapes per m in the Ritz basis. The top ones only serve to bend the lower ones. */
export const BASIS = 7
/** Highest number of nodal diameters. */
export const M_MAX = 8

export interface AirTable { rows: { re: Float64Array, im: Float64Array }[] }

/** Reads the table at a complex kappa: the matrix is in units of rho R. */
export function readAirTable(table: AirTable, kappa: Complex): ComplexMatrix {
  const last = table.rows.length - 1
  const first = Math.min(Math.max(Math.floor(kappa.re / KAPPA_STEP) - 2, 0), last - 5)
  const n = Math.round(Math.sqrt(table.rows[0]!.re.length))
  const out = { n, re: new Float64Array(n * n), im: new Float64Array(n * n) }
  const xr = Math.min(kappa.re, KAPPA_MAX) / KAPPA_STEP - first
  const xi = kappa.im / KAPPA_STEP
  for (let i = 0; i < 6; i++) {
    let wr = 1
    let wi = 0
    for (let j = 0; j < 6; j++) {
      if (j === i) continue
      const ar = (xr - j) / (i - j)
      const ai = xi / (i - j);
      [wr, wi] = [wr * ar - wi * ai, wr * ai + wi * ar]
    }
    const row = table.rows[first + i]!
    for (let e = 0; e < n * n; e++) {
      out.re[e]! += wr * row.re[e]! - wi * row.im[e]!
      out.im[e]! += wr * row.im[e]! + wi * row.re[e]!
    }
  }
  return out
}
