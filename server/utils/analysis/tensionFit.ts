import type { PredictedMode } from '../../../shared/acoustics'
import type { Candidate } from './hypotheses'
import type { MatchingContext } from './matchingContext'
import { UNKNOWN, modeGradient, priorEquations } from './matchingNuisance'
import { modeModelError, unevenError } from './matchingPriors'
import type { ScoreInput, ScoredLine, ScoredMode } from './matchingInput'
import { assignLines, PAIR_LEEWAY } from './matchingAssign'
import { scoreHypothesis } from './matchingScore'
import { solveWeighted, type FitRow } from './tensionSolve'

/** A mode and the line or pair of lines taken for it. */
export interface MatchedLines {
  mode: PredictedMode
  lines: ScoredLine[]
  /** Measured less predicted, ln. */
  residual: number
  /** Standard errors of ln f: of the measurement, of the model. */
  noise: number
  modelError: number
  /** The part of modelError that an uneven head is to blame for. */
  uneven: number
  /** 1 = fully trusted, 0 = an outlier. */
  weight: number
}

export interface TensionFit {
  tensionNPerM: number
  otherTensionNPerM: number
  airScale: { axisymmetric: number, others: number }
  edgeFactor: number
  state: FitState
  modes: PredictedMode[]
  matched: MatchedLines[]
  /** All rows of the last solution, priors included: what moves ln T and by how much. */
  rows: FitRow[]
  /** Covariance of the unknowns by the fit, row-major. */
  covariance: number[]
  /** Log posterior of the hypothesis, up to a constant of the recording. */
  score: number
}

export interface FitState {
  lnTension: number
  lnOther: number
  lnAir: [number, number]
  edge: number
  /** How far areal density, radius, modulus, density of the air and the other head's areal density lie from what was stated, ln. */
  inputs: [number, number, number, number, number]
}

/** A state as the unknowns of the equations, in their order. */
export const unknownsOf = ({ lnTension, lnOther, lnAir, edge, inputs }: FitState) => [lnTension, lnOther, ...lnAir, edge, ...inputs]

const HIGHEST_M = 8
const ORDERS = Array.from({ length: HIGHEST_M + 1 }, (_, m) => m)
/** A residual beyond this many standard errors is more likely a wrong name than a bad prediction. */
const OUTLIER_Z = 3.2
/** Share of the scan's tolerance that always stays when lines are named. */
export const LEAST_WIDEN = 0.15
/** Sensitivities carry the modes over this change of ln T to a part in 10^5. */
const CLOSE_ENOUGH = 0.002
/** Largest step in one round, ln. */
const MOST_STEP = { tension: 0.06, other: 0.25 }
/** An input farther from what was stated than this is not the input's fault, ln. */
const MOST_INPUT = 0.3

/** Start of a fit: natural logarithms of both heads' tensions in N/m as the candidate has them, air as predicted, the edge factor at its prior mean. */
export function stateOf(context: MatchingContext, candidate: Candidate): FitState {
  return stateFrom(context, candidate.lnTension, candidate.lnTension + context.otherOffset + candidate.ratio)
}

/** A state at two tensions, ln of N/m, with air, edge and inputs at what is known of them before. */
export function stateFrom({ airScale, edgeFactor }: MatchingContext, lnTension: number, lnOther: number): FitState {
  return { lnTension, lnOther, lnAir: [Math.log(airScale.axisymmetric), Math.log(airScale.others)], edge: edgeFactor, inputs: [0, 0, 0, 0, 0] }
}

/** Modes at a state, with the inputs as stated; maxHz in Hz. */
export function predictAt(context: MatchingContext, state: FitState, maxHz: number, rough: boolean): PredictedMode[] {
  return context.model.predictModes({
    tensionNPerM: Math.exp(state.lnTension), otherTensionNPerM: Math.exp(state.lnOther), maxHz, nodalDiameters: ORDERS, rough, airModes: true,
    airScale: { axisymmetric: Math.exp(state.lnAir[0]), others: Math.exp(state.lnAir[1]) }, edgeFactor: state.edge,
  })
}

/** Predicted modes ready to be scored; widen is the share of the scan's tolerance. */
export function scoredModes(context: MatchingContext, modes: PredictedMode[], input: ScoreInput, widen: number): ScoredMode[] {
  return modes.map((mode) => {
    const scored = input.describe({ m: mode.m, n: mode.n, other: mode.head === 'other', filmShare: mode.air?.filmShare ?? 1, airSensitivity: mode.sensitivity.lnAirScale })
    const own = mode.air ? context.priors.airResonanceError : modeModelError(context.priors, mode.m, mode.n, false)
    return { ...scored, lnFrequency: Math.log(mode.frequencyHz), damping: mode.radiationDampingPerS, spread: own * (1 - widen) + scored.spread * widen }
  })
}

/** The modes that lines were assigned to, with their lines, residuals (ln) and weights. */
export function matchedLines(context: MatchingContext, modes: PredictedMode[], input: ScoreInput, assignment: Int16Array, widen = LEAST_WIDEN): MatchedLines[] {
  const groups = new Map<number, ScoredLine[]>()
  input.lines.forEach((line, l) => {
    const k = assignment[l]!
    if (k >= 0) groups.set(k, [...(groups.get(k) ?? []), line])
  })
  return [...groups].map(([k, lines]) => {
    const mode = modes[k]!
    const measured = lines.reduce((sum, line) => sum + line.lnFrequency, 0) / lines.length
    const noise = Math.sqrt(lines.reduce((sum, line) => sum + line.spread ** 2, 0)) / lines.length
    const modelError = mode.air ? context.priors.airResonanceError : modeModelError(context.priors, mode.m, mode.n, lines.length > 1)
    const residual = measured - Math.log(mode.frequencyHz)
    const apart = lines.length > 1 && lines[0]!.twin >= 0 && lines[0]!.pairLn === lines[1]!.pairLn ? Math.abs(lines[0]!.lnFrequency - lines[1]!.lnFrequency) : 0
    const z = residual / Math.hypot(noise, modelError, widen * PAIR_LEEWAY * apart)
    const uneven = mode.air ? 0 : unevenError(mode.m, mode.n, lines.length > 1)
    return { mode, lines, residual, noise, modelError, uneven, weight: 1 / (1 + Math.exp(0.5 * (z * z - OUTLIER_Z * OUTLIER_Z))) }
  })
}

/** Rows of the least squares: a matched mode each, then the priors. */
export function fitRows(context: MatchingContext, matched: MatchedLines[], state: FitState): FitRow[] {
  const rows: FitRow[] = matched.map(({ mode, residual, noise, modelError, uneven, weight }) => ({
    source: { kind: 'mode', noise, modelError, uneven },
    gradient: modeGradient(context, mode, Math.exp(state.lnTension), state.edge),
    residual,
    error: Math.hypot(noise, modelError) / Math.sqrt(Math.max(weight, 1e-4)),
  }))
  return [...rows, ...priorEquations(context.priorRows, unknownsOf(state))]
}

const clamp = (value: number, most: number) => Math.min(most, Math.max(-most, value))

/** Modes moved along their sensitivities from where they were predicted: good for steps of a few per cent. */
export function movedModes(modes: PredictedMode[], gradients: number[][], from: FitState, to: FitState): PredictedMode[] {
  const start = unknownsOf(from)
  const step = unknownsOf(to).map((value, i) => value - start[i]!)
  return modes.map((mode, k) => ({ ...mode, frequencyHz: mode.frequencyHz * Math.exp(gradients[k]!.reduce((sum, g, i) => sum + g * step[i]!, 0)) }))
}

export interface FitEffort {
  /** Predictions by the model; between them modes move along their sensitivities. */
  predictions: number
  /** Rounds of naming and solving after each prediction. */
  rounds: number
  /** Share of the scan's wide tolerance used when naming in the first round; it shrinks to the model's own. */
  widen: number
  /** Predictions may be rough: for a first look. */
  rough: boolean
}

/**
 * Posterior of ln T for one hypothesis: Gauss-Newton on ln T, the other head's tension, two air scales, the edge
 * factor and the maker's own figures, with lines named afresh in every round and outliers weighted down.
 */
export function fitTension(context: MatchingContext, input: ScoreInput, start: FitState, effort: FitEffort): TensionFit {
  let state = start
  let modes: PredictedMode[] = []
  let widen = effort.widen
  for (let prediction = 0; prediction < effort.predictions; prediction++) {
    const origin = state
    const predicted = predictAt(context, origin, input.maxHz, effort.rough)
    const gradients = predicted.map(mode => modeGradient(context, mode, Math.exp(origin.lnTension), origin.edge))
    // The model knows the stated inputs only: what the fit makes of them is put on along the sensitivities.
    const stated: FitState = { ...origin, inputs: [0, 0, 0, 0, 0] }
    modes = movedModes(predicted, gradients, stated, origin)
    for (let round = 0; round < effort.rounds; round++) {
      const scored = scoredModes(context, modes, input, widen)
      const matched = matchedLines(context, modes, input, assignLines(scored, input), widen)
      if (matched.length === 0) break
      const { step } = solveWeighted(fitRows(context, matched, state))
      state = moved(context, state, step)
      modes = movedModes(predicted, gradients, stated, state)
      widen = Math.max(LEAST_WIDEN, widen / 2)
      if (Math.abs(step[0]!) < 1e-6) break
    }
    if (Math.abs(state.lnTension - origin.lnTension) < CLOSE_ENOUGH && Math.abs(state.lnOther - origin.lnOther) < 4 * CLOSE_ENOUGH) break
  }
  return summarise(context, input, state, modes)
}

/** A state after a step of the equations (ln of N/m and of the inputs, dimensionless), in their order of unknowns; steps are held to what the equations are good for. */
export function moved(context: MatchingContext, state: FitState, step: number[]): FitState {
  const { priors, twoHeads } = context
  const lnTension = state.lnTension + clamp(step[UNKNOWN.tension]!, MOST_STEP.tension)
  return {
    lnTension,
    lnOther: twoHeads ? state.lnOther + clamp(step[UNKNOWN.other]!, MOST_STEP.other) : lnTension,
    lnAir: [clamp(state.lnAir[0] + step[UNKNOWN.airAxisymmetric]!, 4 * priors.airAxisymmetric), clamp(state.lnAir[1] + step[UNKNOWN.airOthers]!, 4 * priors.airOthers)],
    edge: Math.min(1, Math.max(0, state.edge + clamp(step[UNKNOWN.edge]!, 0.3))),
    inputs: state.inputs.map((value, i) => clamp(value + step[UNKNOWN.density + i]!, MOST_INPUT)) as FitState['inputs'],
  }
}

function summarise(context: MatchingContext, input: ScoreInput, state: FitState, modes: PredictedMode[]): TensionFit {
  const scored = scoredModes(context, modes, input, LEAST_WIDEN)
  const assignment = assignLines(scored, input)
  const matched = matchedLines(context, modes, input, assignment)
  const rows = fitRows(context, matched, state)
  const { covariance, lnDeterminant } = solveWeighted(rows)
  const priorRows = rows.filter(row => row.source.kind !== 'mode')
  const priorCost = priorRows.reduce((sum, row) => sum + 0.5 * (row.residual / row.error) ** 2 + Math.log(row.error), 0)
  return {
    tensionNPerM: Math.exp(state.lnTension),
    otherTensionNPerM: Math.exp(state.lnOther),
    airScale: { axisymmetric: Math.exp(state.lnAir[0]), others: Math.exp(state.lnAir[1]) },
    edgeFactor: state.edge,
    state, modes, matched, rows, covariance,
    // Laplace's approximation over all unknowns: a hypothesis that needs fine tuning is worth less.
    score: scoreHypothesis(scored, input, assignment) - priorCost + 0.5 * lnDeterminant,
  }
}
