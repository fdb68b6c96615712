import { airAt, createDrumModel, filmThicknessM, type DrumModel, type HeadFilm } from '../../../shared/acoustics'
import type { ExplainRequest } from './explanation'
import { priorRows, type PriorRow } from './matchingNuisance'
import { EDGE_MEAN, modelPriors, type ModelPriors } from './matchingPriors'
import type { AnalysedHead, AnalysedInstrument, Construction } from './types'

/** A drum ready for matching: its model, and the range of tensions that its film can be at. */
export interface MatchingContext {
  key: string
  construction: Construction
  model: DrumModel
  /** Two heads: each by itself on the closed shell, struck one first, for searches. */
  alone: DrumModel[]
  priors: ModelPriors
  /** What the fit is told of air, edge and the maker's figures. */
  priorRows: PriorRow[]
  /** Air and edge to start from. */
  airScale: { axisymmetric: number, others: number }
  edgeFactor: number
  film: HeadFilm
  twoHeads: boolean
  /** Range of ln T of the struck head. */
  lnTensionFrom: number
  lnTensionTo: number
  /** ln(sigma_other / sigma_struck): both heads at the same wave speed when T differs by as much. */
  otherOffset: number
}

/** Slackest head that still rings, as stress in the film, Pa. */
const LEAST_STRESS_PA = 0.4e6
/** Yield stresses are scattered, most of all of skin: heads above the stated one are searched too. */
const ABOVE_YIELD = 1.2
const MOST_KEPT = 8

const kept = new Map<string, MatchingContext>()

function filmOf(head: AnalysedHead): HeadFilm {
  const { plies, plyThicknessM, filmDensityKgM3, modulusPa, poisson, yieldPa, arealDensityKgM2 } = head
  return { plies, plyThicknessM, filmDensityKgM3, modulusPa, poisson, yieldPa, arealDensityKgM2 }
}

/**
 * The drum of a request, made once and kept for the next recordings of the same drum at the same temperature.
 *
 * @throws RangeError when the instrument's figures are outside the model's range
 */
export function matchingContext(request: ExplainRequest): MatchingContext {
  const { side, temperatureC } = request
  const instrument = asCalibrated(request)
  const { calibration } = instrument
  const struck = instrument.heads.find(head => head.side === side) ?? instrument.heads[0]
  if (!struck) throw new RangeError('the instrument has no head')
  const twoHeads = instrument.construction === 'double-headed'
  const other = instrument.heads.find(head => head !== struck) ?? struck
  const key = JSON.stringify([instrument.construction, instrument.radiusM, instrument.depthM, instrument.bowlVolumeM3, struck, twoHeads ? other : null, temperatureC, instrument.uncertainty, calibration])
  const known = kept.get(key)
  if (known) return known
  const film = filmOf(struck)
  const { construction, radiusM, depthM, bowlVolumeM3 } = instrument
  const airScale = { axisymmetric: calibration?.airScaleAxisymmetric.value ?? 1, others: calibration?.airScaleOthers.value ?? 1 }
  const edgeFactor = calibration?.edgeFactor.value ?? EDGE_MEAN
  const model = createDrumModel({ geometry: { construction, radiusM, depthM, bowlVolumeM3 }, film, otherFilm: twoHeads ? filmOf(other) : undefined, air: airAt({ temperatureC }), airScale, edgeFactor })
  const closed = { construction: 'kettle' as const, radiusM, depthM, bowlVolumeM3: Math.PI * radiusM ** 2 * Math.max(depthM, 0.02 * radiusM) }
  const alone = twoHeads ? [film, filmOf(other)].map(own => createDrumModel({ geometry: closed, film: own, air: airAt({ temperatureC }), airScale, edgeFactor })) : []
  const priors = modelPriors(construction)
  const otherOffset = Math.log(other.arealDensityKgM2 / struck.arealDensityKgM2)
  const made: MatchingContext = {
    key, construction, model, alone, film, twoHeads, priors, airScale, edgeFactor, otherOffset,
    priorRows: priorRows({ priors, request: { instrument, temperatureC }, otherOffset, twoHeads }),
    lnTensionFrom: Math.log(LEAST_STRESS_PA * filmThicknessM(film)),
    lnTensionTo: Math.log(Math.max(ABOVE_YIELD * film.yieldPa, 40e6) * filmThicknessM(film)),
  }
  if (kept.size >= MOST_KEPT) kept.delete(kept.keys().next().value!)
  kept.set(key, made)
  return made
}

/** The instrument with the radius and the struck head's areal density that its calibration found. */
function asCalibrated({ instrument, side }: ExplainRequest): AnalysedInstrument {
  const { calibration } = instrument
  if (!calibration) return instrument
  const struck = instrument.heads.find(head => head.side === side) ?? instrument.heads[0]
  return {
    ...instrument,
    radiusM: calibration.radiusM.value,
    heads: instrument.heads.map(head => (head === struck ? { ...head, arealDensityKgM2: calibration.arealDensityKgM2.value } : head)),
  }
}
