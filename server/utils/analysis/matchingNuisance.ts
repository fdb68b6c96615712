import { bendingStiffnessNm, type PredictedMode } from '../../../shared/acoustics'
import type { ExplainRequest } from './explanation'
import type { MatchingContext } from './matchingContext'
import { EDGE_MEAN, INPUT_UNCERTAINTY, RATIO_SPREAD, type ModelPriors } from './matchingPriors'
import type { FitRow } from './tensionSolve'

/**
 * The unknowns of a fit, in this order; all but the first two have priors that say how well the maker or physics knows
 * them. Inputs are differences from what was stated.
 */
export const UNKNOWN = { tension: 0, other: 1, airAxisymmetric: 2, airOthers: 3, edge: 4, density: 5, radius: 6, modulus: 7, airDensity: 8, otherDensity: 9 } as const
export const UNKNOWNS = 10
/** What a calibration fixes, in the order of its covariance. */
export const CALIBRATED = [UNKNOWN.airAxisymmetric, UNKNOWN.airOthers, UNKNOWN.edge, UNKNOWN.density, UNKNOWN.radius] as const

export type PriorKind = 'air' | 'edge' | 'other' | 'diameter' | 'density' | 'modulus' | 'temperature' | 'calibration' | 'known'

/** A prior: gradient . unknowns = target, with its standard error. */
export interface PriorRow { kind: PriorKind, gradient: number[], target: number, error: number }

const unit = (column: number, value = 1) => Array.from({ length: UNKNOWNS }, (_, i) => (i === column ? value : 0))

/** Priors of one drum as the maker states it: standard deviations of natural logarithms, of the edge factor and of kelvins' share. */
export function priorRows({ priors, request, otherOffset, twoHeads }: { priors: ModelPriors, request: Pick<ExplainRequest, 'instrument' | 'temperatureC'>, otherOffset: number, twoHeads: boolean }): PriorRow[] {
  const { radiusM, uncertainty, calibration } = request.instrument
  const radius = uncertainty?.diameterMm === undefined ? INPUT_UNCERTAINTY.radius : uncertainty.diameterMm / (2000 * radiusM)
  const density = uncertainty?.arealDensityRelative ?? INPUT_UNCERTAINTY.arealDensity
  const one = (kind: PriorKind, column: number, target: number, error: number): PriorRow => ({ kind, gradient: unit(column), target, error: Math.max(error, 1e-6) })
  // One head stands in for the other too: then both are the same tension.
  const ratio = unit(UNKNOWN.other)
  ratio[UNKNOWN.tension] = -1
  return [
    { kind: 'other', gradient: ratio, target: twoHeads ? otherOffset : 0, error: twoHeads ? RATIO_SPREAD : 1e-3 },
    ...(calibration
      ? calibratedRows(calibration.covariance, [Math.log(calibration.airScaleAxisymmetric.value), Math.log(calibration.airScaleOthers.value), calibration.edgeFactor.value, 0, 0])
      : [
          one('air', UNKNOWN.airAxisymmetric, 0, priors.airAxisymmetric),
          one('air', UNKNOWN.airOthers, 0, priors.airOthers),
          one('edge', UNKNOWN.edge, EDGE_MEAN, priors.edgeFactor),
          one('density', UNKNOWN.density, 0, density),
          one('diameter', UNKNOWN.radius, 0, radius),
        ]),
    // The other head's film is part of what is not known of that head.
    one('other', UNKNOWN.otherDensity, 0, twoHeads ? INPUT_UNCERTAINTY.arealDensity : 1e-3),
    one('modulus', UNKNOWN.modulus, 0, INPUT_UNCERTAINTY.modulus),
    one('temperature', UNKNOWN.airDensity, 0, INPUT_UNCERTAINTY.temperatureK / (request.temperatureC + 273.15)),
  ]
}

/** Rows that together say what a calibration's covariance says: L^-1 (x - mean) = 0 with unit errors, C = L L^T. */
function calibratedRows(covariance: number[], mean: number[]): PriorRow[] {
  const inverse = inverseCholesky(CALIBRATED.length, covariance)
  return CALIBRATED.map((_, i) => {
    const gradient = unit(0, 0)
    let target = 0
    CALIBRATED.forEach((column, j) => {
      gradient[column] = inverse[i]![j]!
      target += inverse[i]![j]! * mean[j]!
    })
    return { kind: 'calibration' as const, gradient, target, error: 1 }
  })
}

/** L^-1 of a symmetric positive definite matrix C = L L^T, row-major. @throws RangeError when it is not positive definite */
function inverseCholesky(size: number, matrix: number[]): number[][] {
  const lower = Array.from({ length: size }, () => new Array<number>(size).fill(0))
  const inverse = Array.from({ length: size }, () => new Array<number>(size).fill(0))
  for (let i = 0; i < size; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * size + j]!
      for (let k = 0; k < j; k++) sum -= lower[i]![k]! * lower[j]![k]!
      if (i === j && !(sum > 0)) throw new RangeError('the covariance of a calibration must be positive definite')
      lower[i]![j] = i === j ? Math.sqrt(sum) : sum / lower[j]![j]!
    }
    for (let j = 0; j <= i; j++) {
      let sum = i === j ? 1 : 0
      for (let k = j; k < i; k++) sum -= lower[i]![k]! * inverse[k]![j]!
      inverse[i]![j] = sum / lower[i]![i]!
    }
  }
  return inverse
}

/** Equations of the priors at a state of the unknowns: natural logarithms of SI figures, and the edge factor (dimensionless). */
export function priorEquations(rows: PriorRow[], at: ArrayLike<number>): FitRow[] {
  return rows.map(({ kind, gradient, target, error }) => ({
    source: { kind }, gradient, error,
    residual: target - gradient.reduce((sum, g, i) => sum + (g === 0 ? 0 : g * at[i]!), 0),
  }))
}

/**
 * Derivatives of ln f of one mode by the unknowns, in their order.
 *
 * By ln R: the film alone goes as 1/R, that is as T^-2 would; the air's mass grows with R. By ln E: the bending term itself,
 * and the edge layer, which goes as sqrt(D).
 * @param edge  edge factor at which the mode was predicted
 */
export function modeGradient(context: MatchingContext, mode: PredictedMode, tensionNPerM: number, edge: number): number[] {
  const s = mode.sensitivity
  const k2 = (2 * Math.PI * mode.idealHz) ** 2 * context.film.arealDensityKgM2 / tensionNPerM
  return [
    s.lnTension,
    context.twoHeads ? s.lnOtherTension : 0,
    mode.m === 0 ? s.lnAirScale : 0,
    mode.m === 0 ? 0 : s.lnAirScale,
    s.edgeFactor,
    s.lnArealDensity,
    -2 * (s.lnTension + s.lnOtherTension) + s.lnAirScale,
    0.5 * bendingStiffnessNm(context.film) * k2 / tensionNPerM + 0.5 * edge * s.edgeFactor,
    s.lnAirScale,
    context.twoHeads ? s.lnOtherArealDensity : 0,
  ]
}
