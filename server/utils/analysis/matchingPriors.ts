import type { Construction } from './types'

/** What the model cannot know, as standard deviations; physics.md sections 2, 4 and 7. */
export interface ModelPriors {
  /** Of ln(air scale) of m = 0. */
  airAxisymmetric: number
  /** Of ln(air scale) of m >= 1. */
  airOthers: number
  /** Of the edge factor around 0.5 (it lies between 0 and 1). */
  edgeFactor: number
  /** Own relative error of frequency of each m = 0 mode: shape of the shell's air, leaks, the other head. */
  axisymmetricError: number
  /** The same for m >= 1. */
  othersError: number
  /** The same for a resonance of the shell's own air: a mouth's end, a bowl's shape. */
  airResonanceError: number
}

/**
 * The air's scale is known best where nothing but open air is near. A shell's mouth, vent, legs and stand, a bowl's shape
 * and the coupling of two heads are the maker's own; each instrument's readings will narrow them.
 */
const PRIORS: Record<Construction, ModelPriors> = {
  'fixture': { airAxisymmetric: 0.02, airOthers: 0.01, edgeFactor: 0.2, axisymmetricError: 0.001, othersError: 0.0007, airResonanceError: 0.02 },
  'frame': { airAxisymmetric: 0.03, airOthers: 0.015, edgeFactor: 0.2, axisymmetricError: 0.001, othersError: 0.0007, airResonanceError: 0.02 },
  'open': { airAxisymmetric: 0.1, airOthers: 0.03, edgeFactor: 0.2, axisymmetricError: 0.005, othersError: 0.001, airResonanceError: 0.02 },
  'kettle': { airAxisymmetric: 0.1, airOthers: 0.03, edgeFactor: 0.2, axisymmetricError: 0.004, othersError: 0.001, airResonanceError: 0.02 },
  'double-headed': { airAxisymmetric: 0.08, airOthers: 0.03, edgeFactor: 0.2, axisymmetricError: 0.004, othersError: 0.0018, airResonanceError: 0.02 },
}

/** How far the model may be off for this construction: standard deviations of natural logarithms, dimensionless. */
export function modelPriors(construction: Construction): ModelPriors {
  return PRIORS[construction]
}

/**
 * Priors for naming: real bowls and films stray from what is stated, and a name must survive that; the tight ones above hold
 * for the figure only where they fit what was named.
 */
const NAMING: Partial<Record<Construction, ModelPriors>> = {
  kettle: { airAxisymmetric: 0.15, airOthers: 0.1, edgeFactor: 0.2, axisymmetricError: 0.01, othersError: 0.006, airResonanceError: 0.02 },
}

/** How far a real drum of this construction may be from its model, for telling which line is which mode: as modelPriors. */
export function namingPriors(construction: Construction): ModelPriors {
  return NAMING[construction] ?? PRIORS[construction]
}

/** Mean of the edge factor: the film runs on over the edge, half-way between hinged and clamped. */
export const EDGE_MEAN = 0.5

/** The other head's wave speed squared lies within this of the struck one's, ln, one standard deviation: a fourth either way. */
export const RATIO_SPREAD = 0.5

/** Standard deviation of N_2m / N_0 on a head that nobody calls uneven: 1.5 % swing at the rim, falling with the harmonic. */
const HARMONIC_RATIO = 0.01

/**
 * What an uneven head adds to the relative standard error of one mode's frequency: a pair (m,n) splits by
 * (4m - 1)/(2 (4m^2 - 1)) N_2m/N_0, and one line of it may be either; m = 2 and m = 0, n >= 4 move at second order.
 * @param asPair  both lines were heard: their mean is free of the split
 * Source: physics.md sections 4 and 7.
 */
export function unevenError(m: number, n: number, asPair: boolean): number {
  if (m === 0) return n >= 4 ? 0.0015 : 0
  const split = asPair ? 0 : (4 * m - 1) / (2 * (4 * m * m - 1)) * HARMONIC_RATIO / 2 / Math.sqrt(m)
  return Math.hypot(split, m === 2 ? 0.0004 : 0)
}

/** Relative standard error of one mode's frequency as the even model predicts it: the model's own, and what an uneven head adds. */
export function modeModelError(priors: ModelPriors, m: number, n: number, asPair: boolean): number {
  const own = m === 0 ? Math.hypot(priors.axisymmetricError, n >= 4 ? 0 : 0.0004 * n) : Math.hypot(priors.othersError, 0.0003 * (n - 1))
  return Math.hypot(own, unevenError(m, n, asPair))
}

/** Standard uncertainties of what the maker states, relative unless said: tape on the diameter, data sheet of the film. */
export const INPUT_UNCERTAINTY = { radius: 0.001, arealDensity: 0.01, modulus: 0.1, temperatureK: 1 }
