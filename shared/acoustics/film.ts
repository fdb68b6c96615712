import type { HeadFilm } from './types'

/**
 * Bending stiffness D of a head whose plies slide on each other, N m: plies * E h^3 / (12 (1 - nu^2)), h one ply's thickness.
 *
 * Source: Timoshenko & Woinowsky-Krieger, Theory of Plates and Shells, ch. 1.
 */
export function bendingStiffnessNm(film: HeadFilm): number {
  return film.plies * film.modulusPa * film.plyThicknessM ** 3 / (12 * (1 - film.poisson ** 2))
}

/** Thickness of all plies, m. A coating carries no tension and is left out. Source: definition. */
export function filmThicknessM(film: HeadFilm): number {
  return film.plies * film.plyThicknessM
}

/** Areal density of the bare film, kg/m2: plies * thickness * density. Source: definition. */
export function bareArealDensityKgM2(film: Pick<HeadFilm, 'plies' | 'plyThicknessM' | 'filmDensityKgM3'>): number {
  return film.plies * film.plyThicknessM * film.filmDensityKgM3
}

export interface FilmStress {
  stressPa: number
  /** Stress by yield stress, dimensionless. */
  shareOfYield: number
}

/** Stress T/h in the film, Pa, and its share of yield. @param tensionNPerM T, N/m, >= 0. Source: definition of stress, force by section. */
export function filmStress(film: HeadFilm, tensionNPerM: number): FilmStress {
  const stressPa = tensionNPerM / filmThicknessM(film)
  return { stressPa, shareOfYield: stressPa / film.yieldPa }
}

/**
 * Vibrating radius less the layer in which the film bends over the edge, m: R - c sqrt(D / T).
 *
 * @param edgeFactor  c, 0 hinged to 1 clamped, dimensionless
 * Source: Timoshenko & Woinowsky-Krieger, ch. 8 (plates under tension: boundary layer sqrt(D/T)).
 */
export function effectiveRadiusM(radiusM: number, stiffnessNm: number, tensionNPerM: number, edgeFactor: number): number {
  return radiusM - edgeFactor * Math.sqrt(stiffnessNm / tensionNPerM)
}
