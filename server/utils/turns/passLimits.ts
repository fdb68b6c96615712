import { type HeadFilm, filmThicknessM } from '../../../shared/acoustics'
import type { Kappa } from './kappa'

/** The workshop's habit: no rod goes further than half a turn before the head is heard again. */
export const MOST_SIXTEENTHS = 8
/** Share of the present tension that a pass may take off even if the rods pull two standard deviations more than thought. */
const MOST_SLACKENING = 0.8

/** Highest mean tension before the film yields, N/m. */
export const yieldTension = (film: HeadFilm) => film.yieldPa * filmThicknessM(film)

export interface PassStart { tensionNPerM: number, film: HeadFilm, kappa: Kappa, /** K_0 p, N/m a turn. */ rise: number }

/**
 * As many sixteenths as one pass may turn towards `wanted`: half a turn, and less where the film could yield or hang loose
 * if the rods pull two standard deviations harder than is known.
 */
export function limitPass({ tensionNPerM, film, kappa, rise }: PassStart, wanted: number): number {
  const strongest = (kappa.value + 2 * Math.sqrt(kappa.variance)) * rise / 16
  const room = wanted > 0 ? yieldTension(film) - tensionNPerM : MOST_SLACKENING * tensionNPerM
  const most = Math.min(MOST_SIXTEENTHS, Math.max(0, Math.floor(room / strongest)))
  // `|| 0`: no turn is 0, not -0.
  return Math.sign(wanted) * Math.min(Math.abs(wanted), most) || 0
}
