/** What is known of a head's rods: the share kappa of the ideal rise per turn, and its variance. */
export interface Kappa { value: number, variance: number, passes: number }

/** Hoop and shell take about half of a turn, give or take a fifth (estimate, common practice, no source): what a first pass starts from. */
export const KAPPA_PRIOR: Kappa = { value: 0.5, variance: 0.2 ** 2, passes: 0 }

/** Hands set a rod to about a thirty-second of a turn; over n rods the errors average out. */
const TURN_STANDARD = 1 / 32 / Math.sqrt(3)
/** Hoops stick on the bearing edge: a rise comes out within some 5 % of itself (estimate). */
const STICKING_SHARE = 0.05
/** Less than this teaches nothing that the errors do not drown. */
const LEAST_MEAN_TURNS = 1 / 32
/** A wrong modulus or pitch of thread can carry the effective share past 1. */
const KAPPA_RANGE = { low: 0.05, high: 1.3 } as const
/** Rods loosen and films creep between passes: some of what was learned is forgotten each time, variance. */
const FORGETTING_VARIANCE = 0.02 ** 2

export interface Adjustment {
  /** Mean of all rods' turns, positive to tighten. */
  meanTurns: number
  rodCount: number
  /** K_0 p, N/m a turn. */
  idealRisePerTurn: number
  beforeNPerM: number
  afterNPerM: number
  /** Standard uncertainty of the difference of both readings on the same bench, N/m. */
  differenceStandardNPerM: number
}

/**
 * One step of recursive least squares, the prior being its regularisation: y = kappa x + noise with y the rise of tension
 * and x = K_0 p times the mean turns.
 *
 *   gain = P x / (x^2 P + r),  kappa += gain (y - kappa x),  P = (1 - gain x) P
 *
 * Returns what was known unchanged where the turns were too small to teach.
 * Source: Ljung, System Identification, ch. 11 (recursive least squares).
 */
export function learnKappa(known: Kappa, seen: Adjustment): Kappa {
  if (Math.abs(seen.meanTurns) < LEAST_MEAN_TURNS) return known
  const x = seen.idealRisePerTurn * seen.meanTurns
  const y = seen.afterNPerM - seen.beforeNPerM
  const setting = known.value * seen.idealRisePerTurn * TURN_STANDARD / Math.sqrt(seen.rodCount)
  const noise = seen.differenceStandardNPerM ** 2 + setting ** 2 + (STICKING_SHARE * y) ** 2
  const variance = known.variance + (known.passes > 0 ? FORGETTING_VARIANCE : 0)
  const gain = variance * x / (x * x * variance + noise)
  const value = known.value + gain * (y - known.value * x)
  return { value: Math.min(KAPPA_RANGE.high, Math.max(KAPPA_RANGE.low, value)), variance: (1 - gain * x) * variance, passes: known.passes + 1 }
}
