/** A film weighed before it is mounted: a disc cut from the same sheet, or the blank of the head itself. */
export interface FilmWeighing {
  /** Mass of the disc, kg, > 0. */
  massKg: number
  /** Standard uncertainty of the mass, kg, >= 0: half of the scale's last digit divided by sqrt 3, or its certificate. */
  massStandardKg: number
  /** Diameter that the disc was cut to, m, > 0. */
  cutDiameterM: number
  /** Standard uncertainty of that diameter, m, >= 0. */
  cutDiameterStandardM: number
}

export interface WeighedDensity {
  /** sigma, kg/m2. */
  arealDensityKgM2: number
  /** Its standard uncertainty, kg/m2, and the same as a share of it. */
  standardKgM2: number
  relative: number
}

/**
 * Areal density of a film from the mass of a round disc of it, kg/m2, with its standard uncertainty.
 *
 *   sigma = 4 m / (pi d^2),  (u_sigma / sigma)^2 = (u_m / m)^2 + (2 u_d / d)^2
 *
 * A coating counts with its weight, as it should: it moves with the film. Coated only in the middle, a disc says nothing.
 * @throws RangeError when mass or diameter is not finite and positive, or an uncertainty is negative
 * Source: definition; propagation of uncertainty, JCGM 100:2008, section 5.1.
 */
export function arealDensityByWeighing({ massKg, massStandardKg, cutDiameterM, cutDiameterStandardM }: FilmWeighing): WeighedDensity {
  for (const [name, value] of [['mass', massKg], ['diameter', cutDiameterM]] as const) {
    if (!(Number.isFinite(value) && value > 0)) throw new RangeError(`${name} must be finite and positive, not ${value}`)
  }
  if (!(massStandardKg >= 0 && cutDiameterStandardM >= 0)) throw new RangeError('uncertainties must be 0 or more')
  const arealDensityKgM2 = 4 * massKg / (Math.PI * cutDiameterM ** 2)
  const relative = Math.hypot(massStandardKg / massKg, 2 * cutDiameterStandardM / cutDiameterM)
  return { arealDensityKgM2, standardKgM2: relative * arealDensityKgM2, relative }
}
