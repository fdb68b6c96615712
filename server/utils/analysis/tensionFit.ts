import type { PredictedMode } from '../../../shared/acoustics'
import type { Candidate } from './hypotheses'
import type { MatchingContext } from './matchingContext'
import { RATIO_SPREAD, modeModelError } from './matchingPriors'
import type { ScoreInput, ScoredLine, ScoredMode } from './matchingInput'
import { assignLines, scoreHypothesis } from './matchingScore'
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
  /** 1 = fully trusted, 0 = an outlier. */
  weight: number
}

export interface TensionFit {
  tensionNPerM: number
  otherTensionNPerM: number
  airScale: { axisymmetric: number, others: number }
  edgeFactor: number
  modes: PredictedMode[]
  matched: MatchedLines[]
  /** All rows of the last solution, priors included: what moves ln T and by how much. */
  rows: FitRow[]
  /** Standard error of ln T by the fit. */
  lnTensionError: number
  /** Log posterior of the hypothesis, up to a constant of the recording. */
  score: number
}

export interface FitState {
  lnTension: number
  lnOther: number
  lnAir: [number, number]
  edge: number
}

const HIGHEST_M = 8
const ORDERS = Array.from({ length: HIGHEST_M + 1 }, (_, m) => m)
const EDGE_MEAN = 0.5
/** A residual beyond this many standard errors is more likely a wrong name than a bad prediction. */
const OUTLIER_Z = 3.2
/** Share of the scan's tolerance that always stays when lines are named. */
const LEAST_WIDEN = 0.15
/** Sensitivities carry the modes over this change of ln T to a part in 10^5. */
const CLOSE_ENOUGH = 0.002
/** Largest step in one round, ln. */
const MOST_STEP = { tension: 0.06, other: 0.25 }

/** Start of a fit: natural logarithms of both heads' tensions in N/m as the candidate has them, air as predicted, the edge factor at its prior mean. */
export function stateOf(context: MatchingContext, candidate: Candidate): FitState {
  return { lnTension: candidate.lnTension, lnOther: candidate.lnTension + context.otherOffset + candidate.ratio, lnAir: [0, 0], edge: EDGE_MEAN }
}

function predictAt(context: MatchingContext, state: FitState, maxHz: number, rough: boolean): PredictedMode[] {
  return context.model.predictModes({
    tensionNPerM: Math.exp(state.lnTension), otherTensionNPerM: Math.exp(state.lnOther), maxHz, nodalDiameters: ORDERS, rough,
    airScale: { axisymmetric: Math.exp(state.lnAir[0]), others: Math.exp(state.lnAir[1]) }, edgeFactor: state.edge,
  })
}

function scoredModes(context: MatchingContext, modes: PredictedMode[], input: ScoreInput, widen: number): ScoredMode[] {
  return modes.map((mode) => {
    const scored = input.describe({ m: mode.m, n: mode.n, other: mode.head === 'other', airSensitivity: mode.sensitivity.lnAirScale })
    const own = modeModelError(context.priors, mode.m, mode.n, false)
    return { ...scored, lnFrequency: Math.log(mode.frequencyHz), damping: mode.radiationDampingPerS, spread: own * (1 - widen) + scored.spread * widen }
  })
}

function matchedLines(context: MatchingContext, modes: PredictedMode[], input: ScoreInput, assignment: Int16Array): MatchedLines[] {
  const groups = new Map<number, ScoredLine[]>()
  input.lines.forEach((line, l) => {
    const k = assignment[l]!
    if (k >= 0) groups.set(k, [...(groups.get(k) ?? []), line])
  })
  return [...groups].map(([k, lines]) => {
    const mode = modes[k]!
    const measured = lines.reduce((sum, line) => sum + line.lnFrequency, 0) / lines.length
    const noise = Math.sqrt(lines.reduce((sum, line) => sum + line.spread ** 2, 0)) / lines.length
    const modelError = modeModelError(context.priors, mode.m, mode.n, lines.length > 1)
    const residual = measured - Math.log(mode.frequencyHz)
    const z = residual / Math.hypot(noise, modelError)
    return { mode, lines, residual, noise, modelError, weight: 1 / (1 + Math.exp(0.5 * (z * z - OUTLIER_Z * OUTLIER_Z))) }
  })
}

/** Rows of the least squares: a matched mode each, then the priors. Columns: ln T, ln T_other, ln air m = 0, ln air m >= 1, edge. */
export function fitRows(context: MatchingContext, matched: MatchedLines[], state: FitState): FitRow[] {
  const rows: FitRow[] = matched.map(({ mode, residual, noise, modelError, weight }) => {
    const s = mode.sensitivity
    return {
      source: { kind: 'mode', noise, modelError },
      gradient: [s.lnTension, context.twoHeads ? s.lnOtherTension : 0, mode.m === 0 ? s.lnAirScale : 0, mode.m === 0 ? 0 : s.lnAirScale, s.edgeFactor],
      residual,
      error: Math.hypot(noise, modelError) / Math.sqrt(Math.max(weight, 1e-4)),
    }
  })
  const { priors } = context
  const prior = (column: number, residual: number, error: number, kind: 'air' | 'edge' | 'other'): FitRow => ({
    source: { kind }, gradient: [0, 1, 2, 3, 4].map(c => (c === column ? 1 : 0)), residual, error,
  })
  rows.push(
    prior(1, context.twoHeads ? state.lnTension + context.otherOffset - state.lnOther : 0, context.twoHeads ? RATIO_SPREAD : 1e-3, 'other'),
    prior(2, -state.lnAir[0], priors.airAxisymmetric, 'air'),
    prior(3, -state.lnAir[1], priors.airOthers, 'air'),
    prior(4, EDGE_MEAN - state.edge, priors.edgeFactor, 'edge'),
  )
  return rows
}

const clamp = (value: number, most: number) => Math.min(most, Math.max(-most, value))

/** Modes moved along their sensitivities from where they were predicted: good for steps of a few per cent. */
function movedModes(modes: PredictedMode[], from: FitState, to: FitState): PredictedMode[] {
  return modes.map((mode) => {
    const s = mode.sensitivity
    const air = mode.m === 0 ? to.lnAir[0] - from.lnAir[0] : to.lnAir[1] - from.lnAir[1]
    const change = s.lnTension * (to.lnTension - from.lnTension) + s.lnOtherTension * (to.lnOther - from.lnOther) + s.lnAirScale * air + s.edgeFactor * (to.edge - from.edge)
    return { ...mode, frequencyHz: mode.frequencyHz * Math.exp(change) }
  })
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
 * Posterior of ln T for one hypothesis: Gauss-Newton on ln T, the other head's tension, two air scales and the edge
 * factor, with lines named afresh in every round and outliers weighted down.
 */
export function fitTension(context: MatchingContext, input: ScoreInput, start: FitState, effort: FitEffort): TensionFit {
  let state = start
  let modes: PredictedMode[] = []
  let widen = effort.widen
  for (let prediction = 0; prediction < effort.predictions; prediction++) {
    const origin = state
    const predicted = predictAt(context, origin, input.maxHz, effort.rough)
    modes = predicted
    for (let round = 0; round < effort.rounds; round++) {
      const scored = scoredModes(context, modes, input, widen)
      const matched = matchedLines(context, modes, input, assignLines(scored, input))
      if (matched.length === 0) break
      const { step } = solveWeighted(fitRows(context, matched, state))
      state = stepped(context, state, step)
      modes = movedModes(predicted, origin, state)
      widen = Math.max(LEAST_WIDEN, widen / 2)
      if (Math.abs(step[0]!) < 1e-6) break
    }
    if (Math.abs(state.lnTension - origin.lnTension) < CLOSE_ENOUGH && Math.abs(state.lnOther - origin.lnOther) < 4 * CLOSE_ENOUGH) break
  }
  return summarise(context, input, state, modes)
}

function stepped(context: MatchingContext, state: FitState, step: number[]): FitState {
  const { priors, twoHeads } = context
  const lnTension = state.lnTension + clamp(step[0]!, MOST_STEP.tension)
  return {
    lnTension,
    lnOther: twoHeads ? state.lnOther + clamp(step[1]!, MOST_STEP.other) : lnTension,
    lnAir: [clamp(state.lnAir[0] + step[2]!, 4 * priors.airAxisymmetric), clamp(state.lnAir[1] + step[3]!, 4 * priors.airOthers)],
    edge: Math.min(1, Math.max(0, state.edge + clamp(step[4]!, 0.3))),
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
    modes, matched, rows,
    lnTensionError: Math.sqrt(covariance[0]!),
    // Laplace's approximation over all five unknowns: a hypothesis that needs fine tuning is worth less.
    score: scoreHypothesis(scored, input, assignment) - priorCost + 0.5 * lnDeterminant,
  }
}
