import { KAPPA_ROWS, KAPPA_STEP, emptyAirTable, type AirTable } from './airTable'
import { MAX_NODAL_DIAMETERS, shapeBasis, shapeTransform } from './basis'
import { besselJUpTo } from './bessel'
import { gaussLegendre } from './quadrature'

/** Where the integral over s is cut; what is left beyond is below 1e-6 of the mass. */
const CUT = 100
/** The integrand is even, entire and of exponential type 2 in s, so the trapezoidal rule is exact for any step below pi. */
const STEP = 1
const RADIATION_NODES = 32

let tables: AirTable[] | undefined

/** Adds weight * w_n(kappa) w_n'(kappa) for every m and pair to one row. */
function accumulate(kappa: number, weight: number, row: number, into: AirTable[], part: 'mass' | 'loss', bessel: Float64Array, w: Float64Array): void {
  besselJUpTo(MAX_NODAL_DIAMETERS, kappa, bessel)
  for (let m = 0; m <= MAX_NODAL_DIAMETERS; m++) {
    const basis = shapeBasis(m)
    const table = into[m]!
    const values = table[part]
    let at = row * table.width
    for (let n = 0; n < basis.count; n++) {
      w[n] = shapeTransform(basis.zeros[n]!, basis.slopes[n]!, kappa, bessel[m]!)
      const scaled = weight * w[n]!
      for (let k = 0; k <= n; k++, at++) values[at] = values[at]! + scaled * w[k]!
    }
  }
}

/**
 * Air of a half space on one side of a head in a rigid baffle, as pure numbers for every m and pair (n, n').
 *
 *   M_nn'(kappa0) / (rho0 R) = int_0^inf w_n w_n' kappa / sqrt(kappa^2 - kappa0^2) d kappa
 *
 * w_n is the normalised shape's Hankel transform, kappa0 = omega R / c0 from 0 to KAPPA_MAX. Real part: mass; the part
 * kappa < kappa0 gives the radiation loss. With s^2 = |kappa^2 - kappa0^2| both parts become smooth integrals over s.
 * Computed once for all heads.
 * Source: Morse & Ingard, Theoretical Acoustics, ch. 7; Christian et al., J. Acoust. Soc. Am. 76 (1984) 1336.
 */
export function halfSpaceTables(): AirTable[] {
  if (tables) return tables
  const made: AirTable[] = []
  for (let m = 0; m <= MAX_NODAL_DIAMETERS; m++) made.push(emptyAirTable(shapeBasis(m).count))
  const bessel = new Float64Array(MAX_NODAL_DIAMETERS + 1)
  const w = new Float64Array(16)
  const rule = gaussLegendre(RADIATION_NODES)
  for (let row = 0; row < KAPPA_ROWS; row++) {
    const kappa0 = row * KAPPA_STEP
    for (let s = 0; s <= CUT; s += STEP) {
      accumulate(Math.hypot(kappa0, s), s === 0 ? STEP / 2 : STEP, row, made, 'mass', bessel, w)
    }
    if (row === 0) continue
    for (let i = 0; i < RADIATION_NODES; i++) {
      const angle = rule.nodes[i]! * Math.PI / 2
      const kappa = kappa0 * Math.cos(angle)
      accumulate(kappa, rule.weights[i]! * kappa * Math.PI / 2, row, made, 'loss', bessel, w)
    }
  }
  tables = made
  return made
}
