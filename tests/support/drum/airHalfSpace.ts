/**
 * Half space of air over a film in a rigid baffle: the whole frequency-dependent Hankel integral with every
 * off-diagonal term, in units of rho R:
 *
 *   B_nn'(kappa) = int_0^inf h_n(x) h_n'(x) x / sqrt(x^2 - kappa^2) dx,  h_n(x) = sqrt2 alpha_n J_m(x) / (alpha_n^2 - x^2)
 *
 * for shapes of unit norm int phi^2 r dr = 1. With x = sqrt(kappa^2 + y^2) above kappa and sqrt(kappa^2 - y^2) below,
 * the root's singularity is gone: real part int_0^inf h h' dy, imaginary part int_0^kappa h h' dy.
 * Source: Morse & Ingard, Theoretical Acoustics, ch. 7.
 */
import { besselJ, jmPrime, zerosOfJ } from './bessel'
import { evenEdges, panels } from './quadrature'
import { BASIS, KAPPA_MAX, KAPPA_STEP, M_MAX } from './airTable'
import type { AirTable } from './airTable'

const alphas = Array.from({ length: M_MAX + 1 }, (_, m) => zerosOfJ(m, BASIS))

/** Zeros of J_m used as the Ritz basis. */
export const basisZeros = (m: number): number[] => alphas[m]!

const slopes = alphas.map((row, m) => row.map(alpha => jmPrime(m, alpha)))

/** h_n(x) from a value of J_m(x); at x = alpha_n the limit is taken by series. */
export function shapeTransform(m: number, n: number, x: number, jmx: number): number {
  const alpha = alphas[m]![n]!
  const gap = x - alpha
  if (Math.abs(gap) > 1e-4) return Math.SQRT2 * alpha * jmx / (alpha * alpha - x * x)
  const slope = slopes[m]![n]!
  return -Math.SQRT2 * alpha * (slope - slope / alpha * gap / 2) / (2 * alpha + gap)
}

let tables: AirTable[] | undefined

/** Tables for every m, made once per process. */
export function halfSpaceTables(): AirTable[] {
  tables ??= build()
  return tables
}

export interface Node { x: number, weight: number, part: 're' | 'im' }

const far = panels([...evenEdges(0, 30, 30), ...evenEdges(31.5, 150, 80)], 8)
const near = panels([0, 1], 24)

/** Nodes and weights of the integral at one kappa: sum weight h(x) h'(x) over each part. */
export function halfSpaceNodes(kappa: number): Node[] {
  const nodes: Node[] = Array.from(far.x, (y, i) => ({ x: Math.hypot(kappa, y), weight: far.w[i]!, part: 're' }))
  // y = kappa sin t keeps the nodes dense where x falls to zero.
  for (let i = 0; i < near.x.length && kappa > 0; i++) {
    const x = kappa * Math.cos(near.x[i]! * Math.PI / 2)
    nodes.push({ x, weight: near.w[i]! * Math.PI / 2 * x, part: 'im' })
  }
  return nodes
}

function build(): AirTable[] {
  const made: AirTable[] = alphas.map(() => ({ rows: [] }))
  const jmx = new Float64Array(M_MAX + 2)
  const h = new Float64Array(BASIS)
  const count = Math.round(KAPPA_MAX / KAPPA_STEP) + 1
  for (let step = 0; step < count; step++) {
    const rows = made.map(() => ({ re: new Float64Array(BASIS * BASIS), im: new Float64Array(BASIS * BASIS) }))
    for (const { x, weight, part } of halfSpaceNodes(step * KAPPA_STEP)) {
      besselJ(M_MAX, x, jmx)
      for (let m = 0; m <= M_MAX; m++) {
        for (let n = 0; n < BASIS; n++) h[n] = shapeTransform(m, n, x, jmx[m]!)
        const target = rows[m]![part]
        for (let i = 0; i < BASIS; i++) {
          for (let j = 0; j < BASIS; j++) target[i * BASIS + j]! += weight * h[i]! * h[j]!
        }
      }
    }
    rows.forEach((row, m) => made[m]!.rows.push(row))
  }
  return made
}
