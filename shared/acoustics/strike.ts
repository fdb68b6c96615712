import { besselJ } from './bessel'
import { besselZero } from './besselZeros'
import { shapeAt } from './basis'
import { gaussLegendre } from './quadrature'
import type { PredictedMode } from './types'

export interface RadialShape {
  /** Displacement at x = r/R, 0 to 1; any unit, which the coefficients keep. */
  shape: (x: number) => number
  /** Nodal diameters of the angular factor cos m theta, 0 where left out. */
  m?: number
  /** How many coefficients. */
  count: number
  /** Places where the shape has a kink, 0 < x < 1: the quadrature is split there. */
  kinks?: readonly number[]
}

/**
 * Fourier-Bessel coefficients of a radial shape, n = 1 to count, in the shape's own unit.
 *
 *   a_n = 2 / J_(m+1)(alpha_mn)^2 * int_0^1 f(x) J_m(alpha_mn x) x dx
 *
 * so that f(x) = sum a_n J_m(alpha_mn x): the amplitudes with which a head released from that shape rings.
 * Source: NIST DLMF 10.23(iii), 18.18; Fletcher & Rossing ch. 3.
 */
export function fourierBesselCoefficients({ shape, m = 0, count, kinks = [] }: RadialShape): Float64Array {
  const zeros = Array.from({ length: count }, (_, i) => besselZero(m, i + 1))
  const edges = [0, ...[...kinks].sort((a, b) => a - b), 1]
  // Panels no longer than a third of the shortest wave: 12 nodes there reach rounding.
  const longest = Math.PI / (zeros[count - 1] ?? 1)
  const rule = gaussLegendre(12)
  const sums = new Float64Array(count)
  for (let e = 0; e + 1 < edges.length; e++) {
    const span = edges[e + 1]! - edges[e]!
    const panels = Math.max(4, Math.ceil(span / longest))
    for (let p = 0; p < panels; p++) {
      for (let i = 0; i < rule.nodes.length; i++) {
        const x = edges[e]! + span * (p + rule.nodes[i]!) / panels
        const weighted = shape(x) * x * rule.weights[i]! * span / panels
        if (weighted === 0) continue
        zeros.forEach((zero, n) => {
          sums[n] = sums[n]! + weighted * besselJ(m, zero * x)
        })
      }
    }
  }
  return sums.map((sum, n) => 2 * sum / besselJ(m + 1, zeros[n]!) ** 2)
}

/**
 * What averaging over a round contact patch leaves of a wave of one wavenumber: 2 J_1(ka) / (ka), dimensionless, 1 at a = 0.
 *
 * Exact for a patch inside the rim, by the mean value of solutions of Helmholtz's equation over a disc.
 * @param ka  wavenumber times contact radius = alpha a/R, dimensionless, >= 0
 * Source: NIST DLMF 10.22.1 with Graf's addition theorem, 10.23.7.
 */
export function patchFactor(ka: number): number {
  return ka < 1e-4 ? 1 - ka * ka / 8 : 2 * besselJ(1, ka) / ka
}

/**
 * Bessel weight of mode (m,n) for a blow at x0 = r0/R over a patch of radius a: J_m(alpha x0) * 2 J_1(alpha a/R)/(alpha a/R).
 *
 * Source: patchFactor for the patch; Fletcher & Rossing, The Physics of Musical Instruments, ch. 3, for the mode shapes.
 * @param x0            place of the blow by radius, 0 to 1
 * @param contactRatio  a/R, >= 0
 */
export function besselStrikeWeight(m: number, n: number, x0: number, contactRatio: number): number {
  const zero = besselZero(m, n)
  return besselJ(m, zero * x0) * patchFactor(zero * contactRatio)
}

/**
 * Spectrum of a half-sine contact pulse by its value at 0 Hz, dimensionless: cos(pi f tau) / (1 - (2 f tau)^2).
 *
 * Special value: pi/4 at f tau = 1/2. Negative beyond f tau = 3/2.
 * @param frequencyHz   f, >= 0
 * @param contactTimeS  tau, >= 0
 * Source: Bracewell, The Fourier Transform and Its Applications (transform of a half period of the cosine).
 */
export function contactPulseGain(frequencyHz: number, contactTimeS: number): number {
  const x = 2 * frequencyHz * contactTimeS
  if (Math.abs(x - 1) < 1e-5) return Math.PI / 4 * (1 - (x - 1) / 2)
  return Math.cos(Math.PI * x / 2) / (1 - x * x)
}

export interface Strike {
  /** r0/R, 0 at the centre to 1 at the rim. */
  radialPosition: number
  /** Contact radius by R. */
  contactRatio: number
  /** Contact time, s. */
  contactTimeS: number
  /** Impulse, N s; 1 where left out. */
  impulseNs?: number
}

export interface StrikeTarget {
  modes: readonly PredictedMode[]
  radiusM: number
  arealDensityKgM2: number
  strike: Strike
}

/**
 * Displacement amplitude of each mode at the antinode line theta = theta0 after a blow, m, per normalised shape.
 *
 *   A = I W / (N R^2 mu omega) * gain(f),  W = sum_n a_n shape_n(x0) patch_n,  N = 2 pi for m = 0, pi otherwise
 *
 * mu is the mode's mass per area with its air. The displacement at (x, theta) is A sum_n a_n shape_n(x) cos m(theta - theta0).
 * Source: modal superposition; Fletcher & Rossing ch. 2 and 3.
 */
export function strikeAmplitudes({ modes, radiusM, arealDensityKgM2, strike }: StrikeTarget): Float64Array {
  const impulse = strike.impulseNs ?? 1
  return Float64Array.from(modes, (mode) => {
    let weight = 0
    mode.struckShape.forEach((a, i) => {
      weight += a * shapeAt(mode.m, i + 1, strike.radialPosition) * patchFactor(besselZero(mode.m, i + 1) * strike.contactRatio)
    })
    const area = (mode.m === 0 ? 2 * Math.PI : Math.PI) * radiusM ** 2
    const massPerArea = Math.max(arealDensityKgM2 + mode.addedMassKgM2, 0.1 * arealDensityKgM2)
    const omega = 2 * Math.PI * mode.frequencyHz
    return impulse * weight / (area * massPerArea * omega) * contactPulseGain(mode.frequencyHz, strike.contactTimeS)
  })
}
