import { budgetAndConfidence } from './matchingJudgement'
import type { ExplainLines, Explanation } from './explanation'
import { scanHypotheses } from './hypotheses'
import { matchingContext, type MatchingContext } from './matchingContext'
import { priorRows } from './matchingNuisance'
import { namingPriors } from './matchingPriors'
import { matchedModes, unexplainedPeaks } from './matchingReport'
import { scoreInput, type ScoreInput } from './matchingInput'
import { RefusalError } from './refusal'
import { fitTension, stateOf, type FitEffort, type TensionFit } from './tensionFit'

/** Candidates that are fitted in full, and the effort of the first look and of the full fit. */
const FINALISTS = 5
/** A first look this many nats behind the best is no finalist. */
const OUT_OF_REACH = 25
const FIRST_LOOK: FitEffort = { predictions: 1, rounds: 3, widen: 1, rough: true }
const FULL_FIT: FitEffort = { predictions: 4, rounds: 4, widen: 0.5, rough: false }
const CLOSE_FIT: FitEffort = { predictions: 4, rounds: 4, widen: 1, rough: false }
/** The tight priors hold when this share of what was named stays named, and the tension stays within this, ln. */
const KEPT_SHARE = 0.9
const SAME_HEAD = 0.06
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
  const priors = namingPriors(context.construction)
  const namingDiffers = priors !== context.priors
  const naming = namingDiffers ? { ...context, priors, priorRows: priorRows({ priors, request, otherOffset: context.otherOffset, twoHeads: context.twoHeads }) } : context
  const input = scoreInput(naming, findings, request)
  if (input.lines.length === 0) throw notADrum()
  const fits = rankedFits(context, naming, input)
  const named = fits[0]
  if (!named || named.matched.length === 0) throw notADrum()
  const close = closeFit(context, fits, namingDiffers ? () => scoreInput(context, findings, request) : null)
  const best = close ?? named
  const judged = budgetAndConfidence({ context: close ? context : naming, fits: [best, ...fits.slice(1)], request, strained: !close })
  const lowest = best.modes.find(mode => mode.m === 0 && mode.n === 1)
  const heard = best.matched.find(match => match.mode === lowest && match.weight > 0.3)
  return {
    ...judged,
    fundamentalHz: heard ? heard.lines[0]!.line.frequencyHz : lowest?.frequencyHz ?? context.model.fundamentalHz(best.tensionNPerM, best.otherTensionNPerM),
    modes: matchedModes(best.matched),
    unexplained: unexplainedPeaks(best, findings, request.side),
  }
}

function rankedFits(context: MatchingContext, naming: MatchingContext, input: ScoreInput): TensionFit[] {
  const highest = Math.max(...input.lines.map(line => line.line.frequencyHz))
  const near: ScoreInput = { ...input, maxHz: Math.min(input.maxHz, ABOVE_HIGHEST * highest) }
  const first = scanHypotheses(context, input).map(candidate => fitTension(naming, near, stateOf(context, candidate), FIRST_LOOK))
  first.sort((a, b) => b.score - a.score)
  const finalists: TensionFit[] = []
  for (const fit of first) {
    if (finalists.length >= FINALISTS || fit.score < first[0]!.score - OUT_OF_REACH) break
    if (finalists.some(other => samePlace(other, fit))) continue
    finalists.push(fit)
  }
  const full = finalists.map(fit => fitTension(naming, near, fit.state, FULL_FIT))
  full.sort((a, b) => b.score - a.score)
  if (context.twoHeads && full[0]) {
    // The same two wave speeds on the other way round sound much alike: that reading is always asked too.
    const { state } = full[0]
    const exchanged = { ...state, lnTension: state.lnOther - context.otherOffset, lnOther: state.lnTension + context.otherOffset }
    full.push(fitTension(naming, near, exchanged, FULL_FIT))
    full.sort((a, b) => b.score - a.score)
  }
  return full
}

/**
 * The fit of the best hypothesis by the tight priors, when they were not those of naming; null where what was named does
 * not fit them: then the drum is not quite the stated one, and only the wide fit is honest.
 */
function closeFit(context: MatchingContext, fits: TensionFit[], tight: (() => ScoreInput) | null): TensionFit | null {
  const named = fits[0]!
  if (!tight) return named
  const input = tight()
  const held = fits.filter(fit => Math.abs(Math.log(fit.tensionNPerM / named.tensionNPerM)) < SAME_HEAD)
    .map(fit => fitTension(context, input, fit.state, CLOSE_FIT))
    .filter(fit => Math.abs(Math.log(fit.tensionNPerM / named.tensionNPerM)) < SAME_HEAD && trustedShare(fit) > KEPT_SHARE * trustedShare(named))
    .sort((a, b) => b.score - a.score)
  return held[0] ? { ...held[0], score: named.score } : null
}

function trustedShare(fit: TensionFit): number {
  return fit.matched.reduce((sum, match) => sum + (match.weight > 0.3 ? match.lines.reduce((s, line) => s + line.share, 0) : 0), 0)
}

function samePlace(a: TensionFit, b: TensionFit): boolean {
  return Math.abs(Math.log(a.tensionNPerM / b.tensionNPerM)) < 0.004 && Math.abs(Math.log(a.otherTensionNPerM / b.otherTensionNPerM)) < 0.05
}

function notADrum(): RefusalError {
  return new RefusalError('not-a-drum', 'No tension of this head explains what was heard. Check that the right instrument and head are chosen, and tap again in a quiet room.')
}
