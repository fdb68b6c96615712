/**
 * Sound pressure at a point above the struck head, by the Hankel integral over its motion (Morse & Ingard ch. 7):
 *
 *   baffled: p = rho w^2 int W(k) J_m(k r) exp(-mu z)/mu k dk,  mu = sqrt(k^2 - k0^2)
 *   free disc: p = int p^(k) J_m(k r) exp(-mu z) k dk with the pressure jump of airFreeDisc.ts.
 */
import { besselJ, sphericalJ } from './bessel'
import { add, c, mul, scale } from './complex'
import type { Complex } from './complex'
import { BASIS, M_MAX } from './airTable'
import { shapeTransform } from './airHalfSpace'
import { JUMPS, jumpMatrices, jumpOrder, jumpProjections, solveJump } from './airFreeDisc'
import { evenEdges, panels } from './quadrature'

export interface Listener { radiusM: number, heightM: number, k0: number, density: number, omega: number }

const bessel = new Float64Array(M_MAX + 2)
const away = new Float64Array(M_MAX + 2)
const spherical = new Float64Array(M_MAX + 2 * JUMPS + 1)

/** For each m asked for: pressure per unit coefficient of each unit-norm shape n, without the angular factor. */
export function pressureWeights(orders: number[], filmRadiusM: number, at: Listener, freeDisc: boolean): Map<number, Complex[]> {
  const out = new Map(orders.map(m => [m, Array.from({ length: freeDisc ? JUMPS : BASIS }, () => c(0))]))
  const z = at.heightM / filmRadiusM
  const kappa = at.k0 * filmRadiusM
  const r = at.radiusM / filmRadiusM
  const gather = (x: number, weight: Complex): void => {
    besselJ(M_MAX, x, bessel)
    besselJ(M_MAX, x * r, away)
    if (freeDisc) sphericalJ(M_MAX + 2 * JUMPS, x, spherical)
    for (const m of orders) {
      const row = out.get(m)!
      for (let n = 0; n < row.length; n++) {
        const h = freeDisc ? spherical[jumpOrder(m, n)]! / x : shapeTransform(m, n, x, bessel[m]!)
        row[n] = add(row[n]!, scale(weight, h * away[m]!))
      }
    }
  }
  const end = Math.min(34 / z, 160)
  const far = panels(evenEdges(0, end, Math.max(6, Math.ceil(end / 2.5))), 8)
  for (let i = 0; i < far.x.length; i++) {
    const y = far.x[i]!
    const decay = Math.exp(-y * z) * far.w[i]!
    gather(Math.hypot(kappa, y), c(freeDisc ? decay * y : decay))
  }
  const near = panels(evenEdges(0, Math.PI / 2, 1 + Math.ceil(kappa * (r + z) / 12)), 16)
  for (let i = 0; i < near.x.length; i++) {
    const t = near.x[i]!
    const s = kappa * Math.sin(t)
    const weight = near.w[i]! * kappa * Math.cos(t)
    const wave = c(Math.cos(s * z), Math.sin(s * z))
    // k dk/mu = i ds for the baffled film; k dk = -s ds (k runs down as s runs up) for the free one.
    gather(kappa * Math.cos(t), freeDisc ? scale(wave, weight * s) : mul(wave, c(0, weight)))
  }
  // 1/R of the shape's own norm and R of the mass leave density w^2 for the baffled film.
  const strength = at.density * at.omega ** 2
  if (!freeDisc) {
    out.forEach(row => row.forEach((value, n) => {
      row[n] = scale(value, strength)
    }))
    return out
  }
  return new Map([...out].map(([m, row]) => [m, throughJump(m, row, kappa, strength)]))
}

function throughJump(m: number, row: Complex[], kappa: number, strength: number): Complex[] {
  const g = jumpMatricesCached(kappa)[m]!
  const b = jumpProjections()[m]!
  return Array.from({ length: BASIS }, (_, n) => {
    const solved = solveJump(g, Array.from({ length: JUMPS }, (_unused, j) => b[j * BASIS + n]!))
    return scale(solved.reduce((sum, x, j) => add(sum, mul(x, row[j]!)), c(0)), strength)
  })
}

const cache = new Map<number, ReturnType<typeof jumpMatrices>>()

/** The pressure shapes vary slowly with kappa; a rounded one serves for loudness. */
function jumpMatricesCached(kappa: number): ReturnType<typeof jumpMatrices> {
  const rounded = Math.round(kappa * 4) / 4
  const found = cache.get(rounded) ?? jumpMatrices(rounded)
  cache.set(rounded, found)
  return found
}
