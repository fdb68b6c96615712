import type { HeadCalibration, MatchedMode, Measured } from '../../../shared/types/reading'
import type { ExplainRequest } from './explanation'
import { matchingContext, type MatchingContext } from './matchingContext'
import { CALIBRATED, UNKNOWN, UNKNOWNS, modeGradient, priorEquations } from './matchingNuisance'
import { modeModelError, unevenError } from './matchingPriors'
import { moved, predictAt, stateFrom, unknownsOf, type FitState } from './tensionFit'
import { solveWeighted, type FitRow } from './tensionSolve'

const ROUNDS = 6
const LN_1000 = Math.log(1000)
/** A mode farther off than this many standard errors is a wrong name, and teaches nothing. */
const OUTLIER_Z = 3.5
const FEWEST_MODES = 2

/** What a calibration starts from: a reading's modes, and the tension that the head is known to have had. */
export interface KnownTension {
  modes: MatchedMode[]
  request: ExplainRequest
  /** From a hung weight or a reference reading, N/m, with its standard uncertainty. */
  tensionNPerM: Measured
}

/**
 * What a reading at a known tension teaches of the instrument: scales of the air's mass, edge factor, areal density and
 * radius, with what their errors have in common.
 *
 * The fit of a reading turned round: the tension is known, and the same equations give the rest. An earlier calibration
 * in the request is not built upon.
 * @throws RangeError when the tension or its uncertainty is not positive, or fewer than two of the modes fit the instrument
 * Source: weighted least squares with prior knowledge, JCGM 102:2011; the equations of the drum model.
 */
export function calibrate({ modes, request, tensionNPerM }: KnownTension): HeadCalibration {
  if (!(tensionNPerM.value > 0 && tensionNPerM.standard > 0)) throw new RangeError('the known tension and its standard uncertainty must be positive')
  const bare: ExplainRequest = { ...request, instrument: { ...request.instrument, calibration: undefined } }
  const context = matchingContext(bare)
  const lnKnown = Math.log(tensionNPerM.value)
  let state = stateFrom(context, lnKnown, lnKnown + context.otherOffset)
  let rows: FitRow[] = []
  for (let round = 0; round < ROUNDS; round++) {
    rows = [...modeRows(context, modes, state), ...priorEquations([...context.priorRows, knownRow(lnKnown, tensionNPerM)], unknownsOf(state))]
    if (rows.filter(row => row.source.kind === 'mode').length < FEWEST_MODES) throw new RangeError('too few of the reading\'s tones fit this instrument at that tension')
    const step = solveWeighted(rows).step
    state = moved(context, state, step)
    if (step.every(value => Math.abs(value) < 1e-7)) break
  }
  return calibrationOf(context, state, solveWeighted(rows).covariance, bare, tensionNPerM)
}

function knownRow(target: number, { value, standard }: Measured) {
  const gradient = new Array<number>(UNKNOWNS).fill(0)
  gradient[UNKNOWN.tension] = 1
  return { kind: 'known' as const, gradient, target, error: standard / value }
}

/** One equation for each mode of the reading that the drum at this state has, and that lies near it. */
function modeRows(context: MatchingContext, modes: MatchedMode[], state: FitState): FitRow[] {
  const predicted = predictAt(context, state, 1.3 * Math.max(...modes.map(mode => mode.measuredHz)), false)
  return modes.flatMap((mode): FitRow[] => {
    const twin = predicted.find(p => !p.air && p.m === mode.m && p.n === mode.n && (p.head === 'other') === (mode.head === 'other'))
    if (!twin) return []
    const undamped = Math.hypot(mode.measuredHz, LN_1000 / mode.t60S / (2 * Math.PI))
    const noise = mode.u95Hz / 2 / mode.measuredHz
    const modelError = modeModelError(context.priors, mode.m, mode.n, mode.splitHz !== undefined)
    const gradient = modeGradient(context, twin, Math.exp(state.lnTension), state.edge)
    // The model is predicted with the stated inputs; what the fit makes of them comes along the gradient.
    const shift = state.inputs.reduce((sum, value, i) => sum + gradient[UNKNOWN.density + i]! * value, 0)
    const residual = Math.log(undamped / twin.frequencyHz) - shift
    const z = residual / Math.hypot(noise, modelError, AIR_REACH * Math.abs(twin.sensitivity.lnAirScale) * (mode.m === 0 ? context.priors.airAxisymmetric : context.priors.airOthers), 0.005)
    return Math.abs(z) > OUTLIER_Z ? [] : [{ source: { kind: 'mode', noise, modelError, uneven: unevenError(mode.m, mode.n, mode.splitHz !== undefined) }, gradient, residual, error: Math.hypot(noise, modelError) }]
  })
}

const AIR_REACH = 1.5

function calibrationOf(context: MatchingContext, state: FitState, covariance: number[], { instrument }: ExplainRequest, tensionNPerM: Measured): HeadCalibration {
  const at = (i: number, j: number) => covariance[CALIBRATED[i]! * UNKNOWNS + CALIBRATED[j]!]!
  const spread = (i: number) => Math.sqrt(at(i, i))
  const figure = (value: number, i: number): Measured => ({ value, standard: value * spread(i) })
  const [lnDensity, lnRadius] = state.inputs
  return {
    airScaleAxisymmetric: figure(Math.exp(state.lnAir[0]), 0),
    airScaleOthers: figure(Math.exp(state.lnAir[1]), 1),
    edgeFactor: { value: state.edge, standard: spread(2) },
    arealDensityKgM2: figure(context.film.arealDensityKgM2 * Math.exp(lnDensity), 3),
    radiusM: figure(instrument.radiusM * Math.exp(lnRadius), 4),
    covariance: CALIBRATED.flatMap((_, i) => CALIBRATED.map((__, j) => at(i, j))),
    tensionNPerM,
  }
}
