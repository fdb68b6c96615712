import { filmStress } from '../../../shared/acoustics'
import { studentT95, tensionBudget, type TensionBudget } from './budget'
import type { Explanation, ExplainRequest } from './explanation'
import type { MatchingContext } from './matchingContext'
import { UNKNOWN, UNKNOWNS } from './matchingNuisance'
import { namingPriors } from './matchingPriors'
import type { MatchedLines, TensionFit } from './tensionFit'
import type { ReadingWarning, TwoHeads } from '../../../shared/types/reading'

/** Errors of neighbouring lines are not independent, so odds are tempered before they are believed. */
const TEMPER = 0.5
/** Another explanation counts as another one beyond this difference of tension, relative. */
const DIFFERENT = 0.012
/** Where the air is hardly known one naming spans as much tension as this share of the air's spread. */
const LOOSE_AIR = 0.5
/** Runner-up shown and reading doubtful when the odds are below these. */
const SHOWN_ODDS = 20
const DOUBTFUL_ODDS = 8
/** A line with less weight than this is an outlier. */
const TRUSTED = 0.3
const DOUBTFUL_SCATTER = 2
const DOUBTFUL_EXPLAINED = 0.65
const NEAR_YIELD = 0.8

interface ToJudge {
  context: MatchingContext
  /** Best first. */
  fits: TensionFit[]
  request: ExplainRequest
  /** What was named does not fit the model as closely as it should. */
  strained: boolean
}

type Judged = Pick<Explanation, 'tension' | 'confidence' | 'doubtful' | 'budget' | 'runnerUp' | 'warnings' | 'twoHeads'>

/** Tension with its budget, how far it can be trusted, and what to tell the maker. */
export function budgetAndConfidence({ context, fits, request, strained }: ToJudge): Judged {
  const best = fits[0]!
  const budget = tensionBudget(context, best, request)
  const trusted = best.matched.filter(match => match.weight > TRUSTED)
  const explained = trusted.reduce((sum, match) => sum + match.lines.reduce((s, line) => s + line.share, 0), 0)
  const different = Math.max(DIFFERENT, LOOSE_AIR * namingPriors(context.construction).airOthers)
  const rival = fits.find(fit => Math.abs(Math.log(fit.tensionNPerM / best.tensionNPerM)) > different)
  const odds = rival ? Math.exp(TEMPER * (best.score - rival.score)) : Infinity
  const few = trusted.filter(match => !match.mode.air).length < 2
  const unsound = strained || lowestMissing(best, trusted, request) || neverAtRest(trusted)
  const poor = unsound || budget.scatter > DOUBTFUL_SCATTER || explained < DOUBTFUL_EXPLAINED
  const fitQuality = Math.min(1, explained / 0.9) * (few || unsound ? 0.5 : 1) * Math.min(1, 1.6 / Math.max(budget.scatter, 1e-3))
  const doubtful = few || poor || odds < DOUBTFUL_ODDS
  return {
    tension: { nPerM: best.tensionNPerM, u95NPerM: budget.u95NPerM, repeatabilityU95NPerM: budget.repeatabilityU95NPerM },
    confidence: Math.round(1000 * (odds === Infinity ? 1 : odds / (1 + odds)) * Math.max(0, fitQuality)) / 1000,
    doubtful,
    budget: budget.lines,
    ...(context.twoHeads ? { twoHeads: twoHeadsOf(context, best, budget, request) } : {}),
    runnerUp: rival && odds < SHOWN_ODDS
      ? { tensionNPerM: rival.tensionNPerM, fundamentalHz: context.model.fundamentalHz(rival.tensionNPerM, rival.otherTensionNPerM), odds: Math.round(10 * odds) / 10 }
      : null,
    warnings: warningsFor({ context, best, request, few, poor, close: odds < DOUBTFUL_ODDS ? rival : undefined, onlyAxisymmetric: trusted.every(match => match.mode.m === 0) }),
  }
}

const UNSURE_STRUCK = 0.04
const UNSURE_OTHER = 0.1
/** The coupling is seen when both lowest modes without nodal diameters were heard, or one and enough of the rest. */
function twoHeadsOf(context: MatchingContext, best: TensionFit, budget: TensionBudget, request: ExplainRequest): TwoHeads {
  const variance = best.covariance[UNKNOWN.other * UNKNOWNS + UNKNOWN.other]!
  const other = { nPerM: best.otherTensionNPerM, u95NPerM: studentT95(30) * Math.sqrt(variance) * Math.max(1, budget.scatter) * best.otherTensionNPerM }
  const struck = request.side
  const lowest = best.modes.filter(mode => mode.m === 0 && !mode.air).slice(0, 2)
  const unsure: TwoHeads['unsure'] = []
  if (budget.u95NPerM > UNSURE_STRUCK * best.tensionNPerM) unsure.push(struck)
  if (other.u95NPerM > UNSURE_OTHER * other.nPerM) unsure.push(struck === 'batter' ? 'resonant' : 'batter')
  if (!lowest.every(mode => best.matched.some(match => match.mode === mode && match.weight > TRUSTED))) unsure.push('coupling')
  return { struck, other, unsure }
}

const LOUD_DB = -12
const MOST_RESTLESS = 0.012
/** A tone that air damps hard is unsure by its own width; a glide makes a slow one unsure by a good part of it. */
const RESTLESS_WIDTHS = 0.3
/** After a very hard stroke not one of the loud tones is known at rest to this share of its frequency (95 %). */
function neverAtRest(trusted: MatchedLines[]): boolean {
  const loud = trusted.flatMap(match => match.lines).filter(line => line.levelDb > LOUD_DB)
  return loud.length > 0 && loud.every(({ line }) => 2 * line.standardErrorHz > MOST_RESTLESS * line.frequencyHz && line.standardErrorHz > RESTLESS_WIDTHS * line.gammaPerS / (2 * Math.PI))
}

/** A tap with nothing resting on the centre sounds the lowest (0,1); a bowl alone may swallow it. A reading without it stands on one leg. */
function lowestMissing(best: TensionFit, trusted: MatchedLines[], request: ExplainRequest): boolean {
  if (request.instrument.construction === 'kettle' || (request.centreDamped && request.strike !== 'centre')) return false
  const lowest = best.modes.find(mode => mode.m === 0 && !mode.air)
  return lowest !== undefined && !trusted.some(match => match.mode === lowest)
}

interface WarningFacts {
  context: MatchingContext
  best: TensionFit
  request: ExplainRequest
  few: boolean
  poor: boolean
  close: TensionFit | undefined
  onlyAxisymmetric: boolean
}

const HALF_WAY = 'Tap softly about three quarters of the way out, a finger resting on the centre, the microphone 5 to 30 cm above the head.'
const WHOLE = (value: number) => value.toFixed(0)

function warningsFor({ context, best, request, few, poor, close, onlyAxisymmetric }: WarningFacts): ReadingWarning[] {
  const warnings: ReadingWarning[] = []
  const tapAgain = context.construction === 'kettle' ? 'Tap at the usual playing spot, a quarter of the way in from the rim.' : HALF_WAY
  if (few) warnings.push({ code: 'few-modes', message: `Only one tone of the head could be named, so the reading rests on it alone. ${tapAgain}` })
  if (close) {
    warnings.push({ code: 'close-runner-up', message: `${WHOLE(close.tensionNPerM)} N/m explains this sound almost as well as ${WHOLE(best.tensionNPerM)} N/m. ${tapAgain} Then trust the tension that both taps agree on.` })
  }
  if (poor) warnings.push({ code: 'poor-fit', message: `Some of what was heard is not explained by this head. Check diameter, film and which head was struck; stop other drums and snares from ringing along. ${tapAgain}` })
  if (onlyAxisymmetric && !few && context.construction !== 'fixture' && context.construction !== 'frame') {
    warnings.push({ code: 'centre-only', message: `Only tones of a tap at the centre were heard, and the air in the shell moves those most, so the tension is less certain. ${tapAgain}` })
  }
  if (context.twoHeads && request.strike === 'centre') {
    warnings.push({ code: 'two-heads', message: 'The two heads sound together. For a sharper reading tap near the edge and rest the other head on something soft.' })
  }
  const { shareOfYield } = filmStress(context.film, best.tensionNPerM)
  if (shareOfYield > NEAR_YIELD) {
    warnings.push({ code: 'near-yield', message: `The film is at ${WHOLE(100 * shareOfYield)} % of its yield stress. Do not tighten further; slacken if in doubt, and follow the head maker's limit.` })
  }
  const pair = best.matched.find(match => match.mode.m === 1 && match.mode.n === 1 && match.lines.length > 1)
  if (pair) {
    const split = Math.abs(pair.lines[0]!.lnFrequency - pair.lines[1]!.lnFrequency)
    if (split > 0.015) warnings.push({ code: 'uneven', message: `The (1,1) tone is split by ${(100 * split).toFixed(1)} %: the head pulls unevenly. Even it out rod by rod before tuning to pitch.` })
  }
  return warnings
}
