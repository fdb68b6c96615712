import { budgetAndConfidence } from './matchingJudgement'
import type { ExplainLines, Explanation } from './explanation'
import { scanHypotheses } from './hypotheses'
import { matchingContext } from './matchingContext'
import { matchedModes, unexplainedPeaks } from './matchingReport'
import { scoreInput, type ScoreInput } from './matchingInput'
import { RefusalError } from './refusal'
import { fitTension, stateOf, type FitEffort, type TensionFit } from './tensionFit'

/** Candidates that are fitted in full, and the effort of the first look and of the full fit. */
const FINALISTS = 5
const FIRST_LOOK: FitEffort = { predictions: 1, rounds: 3, widen: 1, rough: true }
const FULL_FIT: FitEffort = { predictions: 4, rounds: 4, widen: 0.5, rough: false }
/** Predictions reach this far above the highest line: modes that should be heard there count as missing. */
const ABOVE_HIGHEST = 1.25

/**
 * Explains a tap's lines by a tension: scores whole hypotheses over the film's range, fits the best ones, and returns the
 * best with its modes, budget and runner-up.
 *
 * @throws RefusalError 'not-a-drum' when no decaying line can be explained by any tension of this film
 */
export const explainLines: ExplainLines = (findings, request): Explanation => {
  const context = matchingContext(request)
  const input = scoreInput(context, findings, request)
  if (input.lines.length === 0) throw notADrum()
  const fits = rankedFits(context, input)
  const best = fits[0]
  if (!best || best.matched.length === 0) throw notADrum()
  const judged = budgetAndConfidence(context, fits, input, request)
  const lowest = best.modes.find(mode => mode.m === 0 && mode.n === 1)
  const heard = best.matched.find(match => match.mode === lowest && match.weight > 0.3)
  return {
    ...judged,
    fundamentalHz: heard ? heard.lines[0]!.line.frequencyHz : lowest?.frequencyHz ?? context.model.fundamentalHz(best.tensionNPerM, best.otherTensionNPerM),
    modes: matchedModes(best),
    unexplained: unexplainedPeaks(best, findings),
  }
}

function rankedFits(context: ReturnType<typeof matchingContext>, input: ScoreInput): TensionFit[] {
  const highest = Math.max(...input.lines.map(line => line.line.frequencyHz))
  const near: ScoreInput = { ...input, maxHz: Math.min(input.maxHz, ABOVE_HIGHEST * highest) }
  const first = scanHypotheses(context, input).map(candidate => fitTension(context, near, stateOf(context, candidate), FIRST_LOOK))
  first.sort((a, b) => b.score - a.score)
  const finalists: TensionFit[] = []
  for (const fit of first) {
    if (finalists.length >= FINALISTS) break
    if (finalists.some(other => samePlace(other, fit))) continue
    finalists.push(fit)
  }
  const full = finalists.map(fit => fitTension(context, near, {
    lnTension: Math.log(fit.tensionNPerM), lnOther: Math.log(fit.otherTensionNPerM),
    lnAir: [Math.log(fit.airScale.axisymmetric), Math.log(fit.airScale.others)], edge: fit.edgeFactor,
  }, FULL_FIT))
  full.sort((a, b) => b.score - a.score)
  return full
}

function samePlace(a: TensionFit, b: TensionFit): boolean {
  return Math.abs(Math.log(a.tensionNPerM / b.tensionNPerM)) < 0.004 && Math.abs(Math.log(a.otherTensionNPerM / b.otherTensionNPerM)) < 0.05
}

function notADrum(): RefusalError {
  return new RefusalError('not-a-drum', 'No tension of this head explains what was heard. Check that the right instrument and head are chosen, and tap again in a quiet room.')
}
