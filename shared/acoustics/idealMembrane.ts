import { besselZero } from './besselZeros'

export interface IdealMembrane {
  /** R, m, > 0. */
  radiusM: number
  /** sigma, kg/m2, > 0. */
  arealDensityKgM2: number
  /** T, N/m, > 0. */
  tensionNPerM: number
}

/**
 * Frequency of mode (m,n) of an ideal circular membrane with a fixed rim, in Hz.
 *
 *   f = alpha_mn / (2 pi R) * sqrt(T / sigma)
 *
 * Ideal: even tension, no bending stiffness, no air. A real head sounds lower (see createDrumModel).
 * @param m  nodal diameters, whole, >= 0
 * @param n  nodal circles, the rim counted, whole, >= 1
 * @throws RangeError when a figure is not finite and positive
 * Source: Fletcher & Rossing, The Physics of Musical Instruments, ch. 3; Rayleigh, The Theory of Sound, ch. IX.
 */
export function idealFrequencyHz(head: IdealMembrane, m: number, n: number): number {
  const { radiusM, arealDensityKgM2, tensionNPerM } = head
  for (const value of [radiusM, arealDensityKgM2, tensionNPerM]) {
    if (!(Number.isFinite(value) && value > 0)) throw new RangeError(`radius, areal density and tension must be finite and positive, not ${value}`)
  }
  return besselZero(m, n) / (2 * Math.PI * radiusM) * Math.sqrt(tensionNPerM / arealDensityKgM2)
}
