import type { PredictedMode } from '../../../shared/acoustics'
import type { MatchingContext } from './matchingContext'
import type { ScoreInput } from './matchingInput'
import { UNKNOWN, UNKNOWNS, modeGradient, priorEquations } from './matchingNuisance'
import { assignLines } from './matchingAssign'
import { scoreHypothesis } from './matchingScore'
import { LEAST_WIDEN, matchedLines, moved, movedModes, predictAt, scoredModes, unknownsOf, type FitState, type MatchedLines } from './tensionFit'
import { solveWeighted, type FitRow } from './tensionSolve'
import type { HeadSide } from '../../../shared/types/reading'

/** One tap of several on the same drum: its lines, and the drum as seen from the head that was tapped. */
export interface Ear { side: HeadSide, context: MatchingContext, input: ScoreInput }

/** What one ear hears of a fit, in the order of the ears. */
export interface Heard { modes: PredictedMode[], matched: MatchedLines[] }

/** A joint fit; state and covariance are seen from the head of the first ear. */
export interface BothFit { state: FitState, rows: FitRow[], covariance: number[], size: number, heard: Heard[], score: number }

const PREDICTIONS = 4
const ROUNDS = 4

/** The same drum seen from its other side. */
function turned(state: FitState): FitState {
  const [density, radius, modulus, air, otherDensity] = state.inputs
  return { ...state, lnTension: state.lnOther, lnOther: state.lnTension, inputs: [otherDensity, radius, modulus, air, density] }
}

function turnedGradient(gradient: number[]): number[] {
  const swapped = [...gradient]
  for (const [a, b] of [[UNKNOWN.tension, UNKNOWN.other], [UNKNOWN.density, UNKNOWN.otherDensity]] as const) {
    swapped[a] = gradient[b]!
    swapped[b] = gradient[a]!
  }
  return swapped
}

/**
 * Fits both tensions of a drum, the air's scales, the edge and the inputs to the lines of several taps at once.
 *
 * @param ears   taps; the first sets which head is called the struck one
 * @param start  tensions and the rest to start from, ln, seen from the first ear
 */
export function fitBoth(ears: Ear[], start: FitState): BothFit {
  const first = ears[0]!
  const seenFrom = (ear: Ear, state: FitState) => (ear.side === first.side ? state : turned(state))
  let state = start
  let widen = 1
  let heard: Heard[] = []
  for (let prediction = 0; prediction < PREDICTIONS; prediction++) {
    const origin = state
    const views = ears.map((ear) => {
      const at = seenFrom(ear, origin)
      const predicted = predictAt(ear.context, at, ear.input.maxHz, false)
      return { predicted, stated: { ...at, inputs: [0, 0, 0, 0, 0] } as FitState, gradients: predicted.map(mode => modeGradient(ear.context, mode, Math.exp(at.lnTension), at.edge)) }
    })
    for (let round = 0; round < ROUNDS; round++) {
      heard = ears.map((ear, e) => {
        const view = views[e]!
        const modes = movedModes(view.predicted, view.gradients, view.stated, seenFrom(ear, state))
        const assignment = assignLines(scoredModes(ear.context, modes, ear.input, widen), ear.input)
        return { modes, matched: matchedLines(ear.context, modes, ear.input, assignment) }
      })
      const { step } = solveWeighted(equations(ears, heard, state, seenFrom))
      state = moved(first.context, state, step)
      widen = Math.max(LEAST_WIDEN, widen / 2)
      if (step.every(value => Math.abs(value) < 1e-6)) break
    }
  }
  const rows = equations(ears, heard, state, seenFrom)
  const { covariance, lnDeterminant } = solveWeighted(rows)
  const priorCost = rows.reduce((sum, row) => sum + (row.source.kind === 'mode' ? 0 : 0.5 * (row.residual / row.error) ** 2 + Math.log(row.error)), 0)
  const evidence = ears.reduce((sum, ear, e) => sum + scoreHypothesis(scoredModes(ear.context, heard[e]!.modes, ear.input, LEAST_WIDEN), ear.input), 0)
  return { state, rows, covariance, size: UNKNOWNS, heard, score: evidence - priorCost + 0.5 * lnDeterminant }
}

function equations(ears: Ear[], heard: Heard[], state: FitState, seenFrom: (ear: Ear, state: FitState) => FitState): FitRow[] {
  const rows = ears.flatMap((ear, e) => heard[e]!.matched.map(({ mode, residual, noise, modelError, uneven, weight }): FitRow => {
    const at = seenFrom(ear, state)
    const gradient = modeGradient(ear.context, mode, Math.exp(at.lnTension), at.edge)
    return {
      source: { kind: 'mode', noise, modelError, uneven },
      gradient: ear.side === ears[0]!.side ? gradient : turnedGradient(gradient),
      residual,
      error: Math.hypot(noise, modelError) / Math.sqrt(Math.max(weight, 1e-4)),
    }
  }))
  return [...rows, ...priorEquations(ears[0]!.context.priorRows, unknownsOf(state))]
}
