import { besselJ, besselZero, contactPulseGain } from '../../../shared/acoustics'
import type { Strike } from './types'

/** How far a level may stand from its expectation, dB, one standard deviation: place, stick and microphone are guesses. */
export const LEVEL_SPREAD_DB = 9.5
/** Contact time of a finger or a soft stick, s. */
const CONTACT_TIME_S = 0.003
/** A finger on the centre takes this from m = 0 by the time listening begins, dB. */
const FINGER_DB = 10
/**
 * What a microphone 5 cm to some metres away loses with each nodal diameter and with the mode's wavenumber, dB: the near
 * field dies away, far sound cancels. Fitted by eye to the levels of simulated drums; the spread above covers the rest.
 */
const PER_DIAMETER_DB = 2.7
const PER_ZERO_DB = 3.2
const PER_ZERO_SQUARED_DB = 0.11
const STEEPEST_ZERO = PER_ZERO_DB / (2 * PER_ZERO_SQUARED_DB)
const AXISYMMETRIC_DB = 3
const OTHER_HEAD_DB = 8

function listeningDb(m: number, zero: number): number {
  const z = Math.min(zero, STEEPEST_ZERO)
  return (m === 0 ? AXISYMMETRIC_DB : -PER_DIAMETER_DB * m) - PER_ZERO_DB * z + PER_ZERO_SQUARED_DB * z * z
}

/** Places by r/R that a strike of this name may really have had, with their prior weights. */
const PLACES: Record<Strike, Array<{ x: number, weight: number }>> = {
  centre: [{ x: 0.04, weight: 1 }, { x: 0.12, weight: 1 }, { x: 0.22, weight: 0.5 }, { x: 0.35, weight: 0.1 }, { x: 0.5, weight: 0.05 }, { x: 0.62, weight: 0.02 }],
  edge: [{ x: 0.5, weight: 0.4 }, { x: 0.6, weight: 0.7 }, { x: 0.7, weight: 1 }, { x: 0.78, weight: 1 }, { x: 0.87, weight: 0.8 }],
  round: [{ x: 0.6, weight: 0.4 }, { x: 0.7, weight: 1 }, { x: 0.78, weight: 1 }, { x: 0.86, weight: 1 }],
}

export interface StrikePlace { x: number, logPrior: number }

/** Places that a strike may have had, r/R (dimensionless, 0 to 1), with the natural logarithm of each one's prior share. */
export function strikePlaces(strike: Strike): StrikePlace[] {
  const total = PLACES[strike].reduce((sum, place) => sum + place.weight, 0)
  return PLACES[strike].map(place => ({ x: place.x, logPrior: Math.log(place.weight / total) }))
}

/** Weight of mode (m,n) for a blow at x, averaged in power over +-0.06 R: nobody hits a nodal line exactly. */
function strikePower(m: number, n: number, x: number): number {
  const zero = besselZero(m, n)
  let sum = 0
  for (const shift of [-0.06, -0.03, 0, 0.03, 0.06]) sum += besselJ(m, zero * Math.min(1, Math.abs(x + shift))) ** 2
  return sum / (5 * besselJ(m + 1, zero) ** 2) * (m === 0 ? 0.5 : 1)
}

/**
 * Expected level of a mode by strike place, dB with an offset common to all modes, without what depends on frequency.
 *
 * @param other         the mode belongs to the head that was not struck
 * @param centreDamped  a finger rested on the centre
 */
export function placeLevelDb(m: number, n: number, x: number, other: boolean, centreDamped: boolean): number {
  return 10 * Math.log10(strikePower(m, n, x) + 1e-5)
    + listeningDb(m, besselZero(m, n))
    - (other ? OTHER_HEAD_DB : 0) - (centreDamped && m === 0 ? FINGER_DB : 0)
}

/** The part of the expected level that depends on frequency alone: pressure rises as omega, the contact pulse takes the high ones. */
export function frequencyLevelDb(frequencyHz: number): number {
  // Beyond its first notch the pulse's spectrum is anybody's guess: its envelope falls as 1/f^2.
  const x = 2 * frequencyHz * CONTACT_TIME_S
  const gain = x < 2 ? Math.abs(contactPulseGain(frequencyHz, CONTACT_TIME_S)) : 1 / (x * x - 1)
  return 20 * Math.log10(frequencyHz * Math.max(gain, 0.01))
}
