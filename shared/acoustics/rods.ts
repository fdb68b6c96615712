import { filmThicknessM } from './film'
import type { HeadFilm } from './types'

export interface RodTurn {
  film: HeadFilm
  radiusM: number
  /** Advance of the rod in one full turn, m. */
  threadPitchM: number
  /** kappa, share of the advance that stretches the film, 0 to 1: the rest is the give of hoop and shell. */
  kappa: number
}

/**
 * Rise of the mean tension when every rod is turned one full turn, N/m: kappa * E h / ((1 - nu) R) * pitch.
 *
 * @throws RangeError when kappa is not in (0, 1] or a length is not positive
 * Source: plane stress of a disc stretched evenly, Timoshenko & Goodier, Theory of Elasticity, ch. 4.
 */
export function tensionPerTurnNPerM({ film, radiusM, threadPitchM, kappa }: RodTurn): number {
  if (!(kappa > 0 && kappa <= 1)) throw new RangeError(`kappa must lie in (0, 1], not ${kappa}`)
  if (!(radiusM > 0 && threadPitchM > 0)) throw new RangeError('radius and thread pitch must be positive')
  return kappa * film.modulusPa * filmThicknessM(film) / ((1 - film.poisson) * radiusM) * threadPitchM
}
