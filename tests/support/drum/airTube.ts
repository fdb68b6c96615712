/**
 * Air inside the shell as a rigid-walled tube, mode by mode of its cross section:
 * length factors F (mass per area over rho) seen by the film, at a complex frequency (time exp(-i w t)).
 *
 *   closed: F = coth(k L)/k on one head, 1/(k sinh k L) from head to head;  k^2 = (b/R)^2 - k0^2
 *   open:   cross modes tanh(k L)/k; the plane wave is a plug that ends in an unflanged mouth.
 *
 * Source: Morse & Ingard, Theoretical Acoustics, ch. 9; mouth: Levine & Schwinger, Phys. Rev. 73 (1948) 383,
 * in the rational fit of Norris & Sheng, J. Sound Vib. 135 (1989) 85 (from memory; checked at its limits).
 */
import { jm, zerosOfJPrime } from './bessel'
import { add, c, div, exp, mul, scale, sqrt, sub } from './complex'
import type { Complex } from './complex'
import { BASIS, M_MAX } from './airTable'
import { basisZeros, shapeTransform } from './airHalfSpace'

export const CROSS_MODES = 24

export interface CrossMode { b: number, coupling: Float64Array }

const crossZeros = Array.from({ length: M_MAX + 1 }, (_, m) => zerosOfJPrime(m, CROSS_MODES))

const crossCache = new Map<string, CrossMode[]>()

/**
 * Cross modes of one m with their coupling to the film's shapes; `filmRatio` is the film's radius over the tube's.
 * coupling_n = int phi_n psi_q r dr / sqrt(int psi_q^2 r dr), in the film's own unit norm.
 */
export function crossModes(m: number, filmRatio: number): CrossMode[] {
  const key = `${m}:${filmRatio}`
  const found = crossCache.get(key)
  if (found) return found
  const made: CrossMode[] = []
  if (m === 0) {
    // psi = 1: int phi_n r dr is the transform at k = 0; the norm of 1 over the tube is R^2/2.
    const coupling = Float64Array.from(basisZeros(0), (_, n) => shapeTransform(0, n, 0, 1) * filmRatio * Math.SQRT2)
    made.push({ b: 0, coupling })
  }
  for (const b of crossZeros[m]!) {
    const x = b * filmRatio
    const norm = Math.sqrt(0.5 * (1 - (m * m) / (b * b))) * Math.abs(jm(m, b))
    const at = jm(m, x)
    made.push({ b, coupling: Float64Array.from({ length: BASIS }, (_, n) => shapeTransform(m, n, x, at) * filmRatio / norm) })
  }
  if (crossCache.size > 40 * (M_MAX + 1)) crossCache.clear()
  crossCache.set(key, made)
  return made
}

/** sinh and cosh share one exponential; large arguments are kept finite by the caller's ratio. */
function hyperbolic(x: Complex): { tanh: Complex, sinhInverse: Complex } {
  // With e = exp(-2x): tanh = (1 - e)/(1 + e), 1/sinh = 2 exp(-x)/(1 - e).
  const e = exp(scale(x, -2))
  const one = c(1)
  return { tanh: div(sub(one, e), add(one, e)), sinhInverse: div(scale(exp(scale(x, -1)), 2), sub(one, e)) }
}

export interface TubeFactors { self: Complex, across: Complex }

/** Factors of a closed tube for one cross mode, in m. */
export function closedTube(b: number, radiusM: number, lengthM: number, k0: Complex): TubeFactors {
  const kappa = sqrt(sub(c((b / radiusM) ** 2), mul(k0, k0)))
  const { tanh, sinhInverse } = hyperbolic(scale(kappa, lengthM))
  return { self: div(c(1), mul(kappa, tanh)), across: div(sinhInverse, kappa) }
}

/** Factor of an open tube for one cross mode, in m. */
export function openTube(b: number, radiusM: number, lengthM: number, k0: Complex, lossless = false): Complex {
  if (b > 0) {
    const kappa = sqrt(sub(c((b / radiusM) ** 2), mul(k0, k0)))
    return div(hyperbolic(scale(kappa, lengthM)).tanh, kappa)
  }
  const ka = lossless ? 0 : k0.re * radiusM
  const reflection = (1 + 0.2 * ka - 0.084 * ka * ka) / (1 + 0.2 * ka + 0.416 * ka * ka)
  const correction = radiusM * (0.6133 + 0.027 * ka * ka) / (1 + 0.19 * ka * ka)
  // Mouth reflects -|r| exp(2 i k0 (L + correction)): F = i (1 + r)/(1 - r) ... = tan(k0 L')/k0 when |r| = 1.
  const phase = exp(mul(c(0, 2 * (lengthM + correction)), k0))
  const r = scale(phase, -Math.max(0.05, reflection))
  const impedance = div(add(c(1), r), sub(c(1), r))
  return div(mul(c(0, 1), impedance), k0)
}

/** Lossless resonances of the tube below `hz`: every one adds a mode to the coupled system. */
export function tubePoles(kind: 'open' | 'closed', m: number, radiusM: number, lengthM: number, sound: number, hz: number): number[] {
  const limit = 2 * Math.PI * hz / sound
  const poles: number[] = []
  for (const { b } of crossModes(m, 1)) {
    for (let j = 0; j < 60; j++) {
      if (kind === 'closed' && b === 0 && j === 0) continue
      const length = kind === 'open' && b === 0 ? lengthM + 0.6133 * radiusM : lengthM
      const along = kind === 'closed' ? j * Math.PI / length : (j + 0.5) * Math.PI / length
      const k = Math.hypot(b / radiusM, along)
      if (k > limit) break
      poles.push(k * sound / (2 * Math.PI))
    }
  }
  return poles.sort((a, b) => a - b)
}
