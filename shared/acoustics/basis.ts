import { besselJ } from './bessel'
import { besselPrimeZero, besselZero } from './besselZeros'

/** Highest number of nodal diameters in the model: (12,1) lies at 6.9 times the ideal (0,1), above what a tap sounds. */
export const MAX_NODAL_DIAMETERS = 12
/** Most nodal circles in one group. */
const MAX_NODAL_CIRCLES = 7
/** Shapes with a larger zero are left out: 10 times the ideal (0,1). */
const MAX_ZERO = 24

/** The shapes J_m(alpha_n x) of one m, in the order of n, normalised to int_0^1 shape(x)^2 x dx = 1. */
export interface ShapeBasis {
  m: number
  count: number
  /** alpha_mn, n from 1. */
  zeros: Float64Array
  /** J_(m+1)(alpha_mn). */
  slopes: Float64Array
}

const bases: ShapeBasis[] = []

/** The shapes used for one m. @param m nodal diameters, 0 to MAX_NODAL_DIAMETERS. Source of their norm: NIST DLMF 10.22.37. */
export function shapeBasis(m: number): ShapeBasis {
  const known = bases[m]
  if (known) return known
  const zeros: number[] = []
  for (let n = 1; n <= MAX_NODAL_CIRCLES; n++) {
    const zero = besselZero(m, n)
    if (n > 2 && zero > MAX_ZERO) break
    zeros.push(zero)
  }
  const basis = { m, count: zeros.length, zeros: Float64Array.from(zeros), slopes: Float64Array.from(zeros, zero => besselJ(m + 1, zero)) }
  bases[m] = basis
  return basis
}

/**
 * The normalised shape sqrt2 J_m(alpha x) / J_(m+1)(alpha) at x = r/R, dimensionless.
 *
 * Source: NIST DLMF 10.22.37, which gives int_0^1 shape(x)^2 x dx = 1.
 * @param m  nodal diameters
 * @param n  nodal circles, >= 1
 * @param x  r/R, 0 to 1
 */
export function shapeAt(m: number, n: number, x: number): number {
  const zero = besselZero(m, n)
  return Math.SQRT2 * besselJ(m, zero * x) / besselJ(m + 1, zero)
}

/**
 * Hankel transform int_0^1 shape(x) J_m(kappa x) x dx = sqrt2 alpha J_m(kappa) / (alpha^2 - kappa^2), dimensionless.
 *
 * Special value: 1/sqrt2 * J_(m+1)(alpha) at kappa = alpha (taken by series close to it).
 * @param alpha         zero of J_m
 * @param slope         J_(m+1)(alpha)
 * @param kappa         kR, >= 0
 * @param besselAtKappa J_m(kappa)
 * Source: NIST DLMF 10.22.37 and 10.22.4.
 */
export function shapeTransform(alpha: number, slope: number, kappa: number, besselAtKappa: number): number {
  const delta = kappa - alpha
  if (Math.abs(delta) < 1e-5) return Math.SQRT2 * alpha * slope * (1 - delta / (2 * alpha)) / (alpha + kappa)
  return -Math.SQRT2 * alpha * besselAtKappa / (delta * (alpha + kappa))
}

/**
 * Overlap of a membrane shape with a rigid tube's cross mode, int_0^1 shape(x) cross(x) x dx, both normalised, dimensionless.
 *
 *   c = 2 alpha / ((alpha^2 - b^2) sqrt(1 - m^2/b^2));  the plane wave (m = 0, q = 0): c = 2 / alpha
 *
 * @param m      nodal diameters
 * @param alpha  zero of J_m
 * @param q      0 for the plane wave (m = 0 only), else number of the zero of J_m'
 * Source: NIST DLMF 10.22.4 with J_m(alpha) = 0 and J_m'(b) = 0.
 */
export function crossModeOverlap(m: number, alpha: number, q: number): number {
  if (q === 0) return 2 / alpha
  const b = besselPrimeZero(m, q)
  return 2 * alpha / ((alpha * alpha - b * b) * Math.sqrt(1 - (m * m) / (b * b)))
}
