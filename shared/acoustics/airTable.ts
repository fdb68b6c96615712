/** Air mass of one m as a function of kappa0 = omega R / c0, in units of rho0 R, on an even grid. */
export interface AirTable {
  /** Values per row: the pairs (n, n') with n' <= n, at n (n + 1) / 2 + n' counted from 0. */
  width: number
  rows: number
  /** Real part: mass. */
  mass: Float64Array
  /** Negative imaginary part: radiation; >= 0 on the diagonal. */
  loss: Float64Array
}

/** Grid step in kappa0; cubic interpolation on it is good to 1e-5 of the mass. */
export const KAPPA_STEP = 0.125
/** Highest kappa0: a film at its yield stress reaches about 15 for the highest shape kept. */
export const KAPPA_MAX = 16
export const KAPPA_ROWS = Math.round(KAPPA_MAX / KAPPA_STEP) + 1

/** A table of zeros for that many shapes of one m: mass and loss as pure numbers, kappa0 from 0 to KAPPA_MAX. Source: definition. */
export function emptyAirTable(shapeCount: number): AirTable {
  const width = shapeCount * (shapeCount + 1) / 2
  return { width, rows: KAPPA_ROWS, mass: new Float64Array(width * KAPPA_ROWS), loss: new Float64Array(width * KAPPA_ROWS) }
}

/** a + factor b, entry by entry. */
export function addAirTables(a: AirTable, b: AirTable, factor = 1): AirTable {
  return {
    width: a.width,
    rows: a.rows,
    mass: a.mass.map((v, i) => v + factor * b.mass[i]!),
    loss: a.loss.map((v, i) => v + factor * b.loss[i]!),
  }
}

/** Four-point Lagrange weights (and their derivative by kappa) and the first row they apply to. */
export interface AirStencil {
  row: number
  weights: Float64Array
  slopes: Float64Array
}

/** A stencil to be placed; its weights and slopes are pure numbers. */
export function newStencil(): AirStencil {
  return { row: 0, weights: new Float64Array(4), slopes: new Float64Array(4) }
}

/**
 * Where kappa0 (omega R / c, a pure number, >= 0) lies on the grid; beyond its end the last value is held.
 *
 * Source: Lagrange's interpolation through four points (Abramowitz & Stegun, 25.2.13).
 */
export function placeStencil(kappa: number, stencil: AirStencil): void {
  const at = Math.min(Math.max(kappa, 0), KAPPA_MAX) / KAPPA_STEP
  const row = Math.min(Math.max(Math.floor(at) - 1, 0), KAPPA_ROWS - 4)
  const t = at - row
  const w = stencil.weights
  const d = stencil.slopes
  stencil.row = row
  w[0] = -(t - 1) * (t - 2) * (t - 3) / 6
  w[1] = t * (t - 2) * (t - 3) / 2
  w[2] = -t * (t - 1) * (t - 3) / 2
  w[3] = t * (t - 1) * (t - 2) / 6
  d[0] = -(3 * t * t - 12 * t + 11) / (6 * KAPPA_STEP)
  d[1] = (3 * t * t - 10 * t + 6) / (2 * KAPPA_STEP)
  d[2] = -(3 * t * t - 8 * t + 3) / (2 * KAPPA_STEP)
  d[3] = (3 * t * t - 6 * t + 2) / (6 * KAPPA_STEP)
}

/** Value of one column through a stencil, in the unit of the values. @param values mass or loss of a table, pure numbers. Source: as placeStencil. */
export function readStencil(values: Float64Array, width: number, column: number, row: number, weights: Float64Array): number {
  const at = row * width + column
  return weights[0]! * values[at]! + weights[1]! * values[at + width]! + weights[2]! * values[at + 2 * width]! + weights[3]! * values[at + 3 * width]!
}
