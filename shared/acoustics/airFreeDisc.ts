import { KAPPA_ROWS, KAPPA_STEP, emptyAirTable, type AirTable } from './airTable'
import { MAX_NODAL_DIAMETERS, shapeBasis } from './basis'
import { sphericalBesselUpTo } from './bessel'
import { solveInPlace } from './linearAlgebra'
import { gaussLegendre } from './quadrature'

/** Pressure functions per m; 8 give the mass of the highest shape to 1e-4. */
const PRESSURE_FUNCTIONS = 8
const CUT = 120
/** Exact for any step below pi: the integrand is even, entire and of exponential type 2 in s. */
const STEP = 1
const RADIATION_NODES = 32
const HIGHEST = MAX_NODAL_DIAMETERS + 2 * PRESSURE_FUNCTIONS

let tables: AirTable[] | undefined

/** Phi_j(kappa) = j_(m+2j+1)(kappa) / kappa for every order m + 2j + 1, by order; the limit at 0 is 1/3 for order 1, else 0. */
function pressureTransforms(kappa: number, out: Float64Array): void {
  sphericalBesselUpTo(HIGHEST, kappa, out)
  if (kappa < 1e-8) {
    out.fill(0)
    out[1] = 1 / 3
    return
  }
  for (let p = 0; p <= HIGHEST; p++) out[p] = out[p]! / kappa
}

/**
 * Air on both sides of a free disc (no baffle), as pure numbers for every m and pair (n, n').
 *
 * Outside the rim the pressure is equal on both sides and so zero in the antisymmetric field. On the disc the velocity
 * potential is expanded in functions that vanish as sqrt(1 - x^2) at the rim, whose Hankel transforms are
 * Phi_j = j_(m+2j+1)(kappa) / kappa (spherical Bessel), and Galerkin's method gives
 *
 *   M_nn' / (rho0 R) = 2 b_n^T A^-1 b_n',  b_nj = sqrt2 Phi_j(alpha_n) / J_(m+1)(alpha_n),
 *   A_jj' = int_0^inf Phi_j Phi_j' sqrt(kappa^2 - kappa0^2) kappa d kappa
 *
 * At kappa0 = 0, A is diagonal: pi / (2 (2p + 1)), p = m + 2j + 1. A rigid disc comes out as 8/3 rho0 R^3.
 * Source: Lamb, Hydrodynamics, sections 102 and 108 (the rigid disc); NIST DLMF 10.22.6 and Sonine's integral 10.22.19.
 */
export function freeDiscTables(): AirTable[] {
  if (tables) return tables
  const made: AirTable[] = []
  for (let m = 0; m <= MAX_NODAL_DIAMETERS; m++) made.push(emptyAirTable(shapeBasis(m).count))
  for (let row = 0; row < KAPPA_ROWS; row++) {
    const field = fieldIntegrals(row * KAPPA_STEP)
    for (let m = 0; m <= MAX_NODAL_DIAMETERS; m++) fillRow(m, row, field, made[m]!)
  }
  tables = made
  return made
}

interface FieldIntegrals { real: Float64Array, imaginary: Float64Array }

const PAIRS = PRESSURE_FUNCTIONS * (PRESSURE_FUNCTIONS + 1) / 2

/** A for every m at one kappa0: real and imaginary part, pairs (j, j') with j' <= j. */
function fieldIntegrals(kappa0: number): FieldIntegrals {
  const real = new Float64Array(PAIRS * (MAX_NODAL_DIAMETERS + 1))
  const imaginary = new Float64Array(real.length)
  const phi = new Float64Array(HIGHEST + 1)
  const add = (into: Float64Array, weight: number) => {
    for (let m = 0, at = 0; m <= MAX_NODAL_DIAMETERS; m++) {
      for (let j = 0; j < PRESSURE_FUNCTIONS; j++) {
        const scaled = weight * phi[m + 2 * j + 1]!
        for (let k = 0; k <= j; k++, at++) into[at] = into[at]! + scaled * phi[m + 2 * k + 1]!
      }
    }
  }
  if (kappa0 > 0) {
    // The integrand falls only as 1/s^2; its value at kappa0 = 0 is known in closed form, the difference falls as 1/s^4.
    for (let s = 0; s <= CUT; s += STEP) {
      const end = s === CUT ? 0.5 : 1
      pressureTransforms(Math.hypot(kappa0, s), phi)
      add(real, end * STEP * s * s)
      pressureTransforms(s, phi)
      add(real, -end * STEP * s * s)
    }
    const rule = gaussLegendre(RADIATION_NODES)
    for (let i = 0; i < RADIATION_NODES; i++) {
      const angle = rule.nodes[i]! * Math.PI / 2
      const s = kappa0 * Math.sin(angle)
      pressureTransforms(kappa0 * Math.cos(angle), phi)
      add(imaginary, rule.weights[i]! * s * s * kappa0 * Math.cos(angle) * Math.PI / 2)
    }
  }
  const tail = -kappa0 * kappa0 / (3 * CUT ** 3)
  for (let m = 0, at = 0; m <= MAX_NODAL_DIAMETERS; m++) {
    for (let j = 0; j < PRESSURE_FUNCTIONS; j++) {
      for (let k = 0; k <= j; k++, at++) {
        real[at] = real[at]! + tail * ((j - k) % 2 === 0 ? 1 : -1) + (j === k ? Math.PI / (2 * (2 * (m + 2 * j + 1) + 1)) : 0)
      }
    }
  }
  return { real, imaginary }
}

/** 2 b^T A^-1 b for all pairs of columns of b, with complex A = real + i imaginary as a real system of twice the size. */
function massOfShapes(m: number, field: FieldIntegrals, b: Float64Array, columns: number): { mass: Float64Array, loss: Float64Array } {
  const size = 2 * PRESSURE_FUNCTIONS
  const a = new Float64Array(size * size)
  const right = new Float64Array(size * columns)
  right.set(b)
  for (let j = 0, at = m * PAIRS; j < PRESSURE_FUNCTIONS; j++) {
    for (let k = 0; k <= j; k++, at++) {
      for (const [r, c] of [[j, k], [k, j]] as const) {
        a[r * size + c] = field.real[at]!
        a[(r + PRESSURE_FUNCTIONS) * size + c + PRESSURE_FUNCTIONS] = field.real[at]!
        a[r * size + c + PRESSURE_FUNCTIONS] = -field.imaginary[at]!
        a[(r + PRESSURE_FUNCTIONS) * size + c] = field.imaginary[at]!
      }
    }
  }
  solveInPlace(size, a, right, columns)
  const mass = new Float64Array(columns * (columns + 1) / 2)
  const loss = new Float64Array(mass.length)
  for (let n = 0, at = 0; n < columns; n++) {
    for (let k = 0; k <= n; k++, at++) {
      for (let j = 0; j < PRESSURE_FUNCTIONS; j++) {
        mass[at] = mass[at]! + 2 * b[j * columns + n]! * right[j * columns + k]!
        loss[at] = loss[at]! - 2 * b[j * columns + n]! * right[(j + PRESSURE_FUNCTIONS) * columns + k]!
      }
    }
  }
  return { mass, loss }
}

function fillRow(m: number, row: number, field: FieldIntegrals, table: AirTable): void {
  const basis = shapeBasis(m)
  const b = new Float64Array(PRESSURE_FUNCTIONS * basis.count)
  const phi = new Float64Array(HIGHEST + 1)
  for (let n = 0; n < basis.count; n++) {
    pressureTransforms(basis.zeros[n]!, phi)
    for (let j = 0; j < PRESSURE_FUNCTIONS; j++) b[j * basis.count + n] = Math.SQRT2 * phi[m + 2 * j + 1]! / basis.slopes[n]!
  }
  const { mass, loss } = massOfShapes(m, field, b, basis.count)
  table.mass.set(mass, row * table.width)
  table.loss.set(loss, row * table.width)
}

/**
 * Air on both sides of a free disc that moves as one shape x^m cos m theta (m = 0: a piston, m = 1: rocking), by rho0 R.
 *
 * Per unit of int_0^1 shape^2 x dx times 2; in whole: kinetic mass = pi rho0 R^3 * mass (m = 0 counts twice).
 * Only the first pressure function is not orthogonal to such a shape when kappa0 = 0: its projection is (2m)!! / (2m+3)!!.
 * Source: Lamb, Hydrodynamics, sections 102 (piston: 8/3 rho0 R^3) and 108 (rocking: 16/45 rho0 R^5).
 */
export function rigidDiscMass(m: 0 | 1, kappa0: number): { mass: number, loss: number } {
  const b = new Float64Array(PRESSURE_FUNCTIONS)
  b[0] = m === 0 ? 1 / 3 : 2 / 15
  const { mass, loss } = massOfShapes(m, fieldIntegrals(kappa0), b, 1)
  return { mass: mass[0]!, loss: loss[0]! }
}
