/**
 * A film in free air with no baffle: the pressure jump lives on the disc only, and outside it the pressure on the
 * plane is zero. Dual integral equation solved by Galerkin's method with
 *
 *   p(r) = sum_j c_j r^m sqrt(1 - r^2) P_j(r^2),  whose Hankel transforms are spherical Bessel functions j_{m+2j+1}(k)/k
 *
 * (Sneddon, Mixed Boundary Value Problems in Potential Theory, ch. 4), and  w^(k) = sqrt(k^2 - kappa^2) p^(k).
 * G_ab(kappa) = int j_a j_b sqrt(k^2 - kappa^2)/k dk; at kappa = 0 it is diagonal, pi/(2(2a+1)).
 * The mass of both faces together is 2 b^T G^-1 b, b_an = <chi_a, phi_n> = int j_a(k) h_n(k) dk.
 */
import { besselJ, sphericalJ } from './bessel'
import { complexMatrix, solveComplex, c } from './complex'
import type { Complex, ComplexMatrix } from './complex'
import { evenEdges, panels } from './quadrature'
import { BASIS, KAPPA_MAX, KAPPA_STEP, M_MAX } from './airTable'
import type { AirTable } from './airTable'
import { shapeTransform } from './airHalfSpace'

/** Pressure shapes per m. */
export const JUMPS = 14
const TOP = M_MAX + 2 * JUMPS

/** Order of the spherical Bessel function that goes with pressure shape j. */
export const jumpOrder = (m: number, j: number): number => m + 2 * j + 1

let projections: Float64Array[] | undefined

/** b[j * BASIS + n] for every m. */
export function jumpProjections(): Float64Array[] {
  projections ??= project()
  return projections
}

function project(): Float64Array[] {
  const made = Array.from({ length: M_MAX + 1 }, () => new Float64Array(JUMPS * BASIS))
  const rule = panels(evenEdges(0, 240, 160), 8)
  const bessel = new Float64Array(M_MAX + 2)
  const spherical = new Float64Array(TOP + 1)
  for (let i = 0; i < rule.x.length; i++) {
    const k = rule.x[i]!
    besselJ(M_MAX, k, bessel)
    sphericalJ(TOP, k, spherical)
    for (let m = 0; m <= M_MAX; m++) {
      for (let n = 0; n < BASIS; n++) {
        const h = shapeTransform(m, n, k, bessel[m]!) * rule.w[i]!
        for (let j = 0; j < JUMPS; j++) made[m]![j * BASIS + n]! += h * spherical[jumpOrder(m, j)]!
      }
    }
  }
  return made
}

/** G(kappa) for one set of orders; `orders` are those of the spherical Bessel functions. */
export function jumpMatrices(kappa: number): ComplexMatrix[] {
  const made = Array.from({ length: M_MAX + 1 }, () => complexMatrix(JUMPS))
  const spherical = new Float64Array(TOP + 1)
  const gather = (k: number, weight: number, part: 're' | 'im'): void => {
    sphericalJ(TOP, k, spherical)
    for (let m = 0; m <= M_MAX; m++) {
      const target = made[m]![part]
      for (let a = 0; a < JUMPS; a++) {
        for (let b = 0; b <= a; b++) target[a * JUMPS + b]! += weight * spherical[jumpOrder(m, a)]! * spherical[jumpOrder(m, b)]!
      }
    }
  }
  if (kappa > 0) {
    const far = panels([...evenEdges(0, 40, 30), ...evenEdges(42, 240, 90)], 8)
    for (let i = 0; i < far.x.length; i++) {
      const y = far.x[i]!
      const k = Math.hypot(kappa, y)
      gather(k, far.w[i]! * (y - k) * y / (k * k), 're')
    }
    const near = panels([0, Math.PI / 2], 24)
    for (let i = 0; i < near.x.length; i++) {
      const t = near.x[i]!
      const k = kappa * Math.sin(t)
      const weight = near.w[i]! * kappa * Math.cos(t)
      gather(k, -weight * kappa * Math.cos(t) / k, 'im')
      gather(k, -weight, 're')
    }
  }
  made.forEach((g, m) => {
    for (let a = 0; a < JUMPS; a++) {
      g.re[a * JUMPS + a]! += Math.PI / (2 * (2 * jumpOrder(m, a) + 1))
      for (let b = 0; b < a; b++) {
        g.re[b * JUMPS + a] = g.re[a * JUMPS + b]!
        g.im[b * JUMPS + a] = g.im[a * JUMPS + b]!
      }
    }
  })
  return made
}

/** Pressure coefficients c = G^-1 b for a given projection b. */
export function solveJump(g: ComplexMatrix, b: number[]): Complex[] {
  return solveComplex(g, b.map(value => c(value)))
}

let tables: AirTable[] | undefined

/** Mass of both faces together, in units of rho R, for every m. */
export function freeDiscTables(): AirTable[] {
  tables ??= build()
  return tables
}

function build(): AirTable[] {
  const made: AirTable[] = Array.from({ length: M_MAX + 1 }, () => ({ rows: [] }))
  const projected = jumpProjections()
  const count = Math.round(KAPPA_MAX / KAPPA_STEP) + 1
  for (let step = 0; step < count; step++) {
    jumpMatrices(step * KAPPA_STEP).forEach((g, m) => {
      const b = projected[m]!
      const row = { re: new Float64Array(BASIS * BASIS), im: new Float64Array(BASIS * BASIS) }
      for (let n = 0; n < BASIS; n++) {
        const solved = solveJump(g, Array.from({ length: JUMPS }, (_, j) => b[j * BASIS + n]!))
        for (let i = 0; i < BASIS; i++) {
          for (let j = 0; j < JUMPS; j++) {
            row.re[i * BASIS + n]! += 2 * b[j * BASIS + i]! * solved[j]!.re
            row.im[i * BASIS + n]! += 2 * b[j * BASIS + i]! * solved[j]!.im
          }
        }
      }
      made[m]!.rows.push(row)
    })
  }
  return made
}
