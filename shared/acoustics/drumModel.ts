import { constructionAir, type GroupAir } from './constructionAir'
import { groupModes } from './groupModes'
import type { GroupState } from './groupMatrices'
import { idealFrequencyHz } from './idealMembrane'
import type { DrumModel, DrumModelOptions, HeadFilm, PredictOptions, PredictedMode } from './types'

const DEFAULT_EDGE_FACTOR = 0.5
const DEFAULT_AIR_SCALE = { axisymmetric: 1, others: 1 }

function requirePositive(name: string, value: number): void {
  if (!(Number.isFinite(value) && value > 0)) throw new RangeError(`${name} must be finite and positive, not ${value}`)
}

function checkFilm(film: HeadFilm): void {
  requirePositive('areal density', film.arealDensityKgM2)
  requirePositive('ply thickness', film.plyThicknessM)
  requirePositive('modulus', film.modulusPa)
  requirePositive('number of plies', film.plies)
  if (!(film.poisson > -1 && film.poisson < 0.5)) throw new RangeError(`Poisson ratio must lie between -1 and 0.5, not ${film.poisson}`)
}

/**
 * A drum as the acoustics sees it: predicts the modes of its head or heads, with air, at any tension.
 *
 * Makes the tables of the construction's air once (some tens of milliseconds for the first drum, less after); a
 * prediction then takes well under a millisecond for one head.
 * @throws RangeError when a dimension or film figure is outside its range
 */
export function createDrumModel(options: DrumModelOptions): DrumModel {
  requirePositive('radius', options.geometry.radiusM)
  requirePositive('air density', options.air.densityKgM3)
  requirePositive('sound speed', options.air.soundSpeedMPerS)
  if (!(options.geometry.depthM >= 0)) throw new RangeError(`shell depth must be 0 or more, not ${options.geometry.depthM}`)
  checkFilm(options.film)
  if (options.otherFilm) checkFilm(options.otherFilm)
  const air = constructionAir(options.geometry)
  const predictModes = (at: PredictOptions) => predict(options, air, at)
  const fundamentalHz = (tensionNPerM: number, otherTensionNPerM?: number) => {
    const modes = predictModes({ tensionNPerM, otherTensionNPerM, nodalDiameters: [0] })
    // Of two heads moving together and against each other, the lower one is what the ear takes as the drum's note.
    return modes[0]!.frequencyHz
  }
  return {
    options,
    predictModes,
    fundamentalHz,
    tensionForFundamental: (frequencyHz, otherTensionNPerM) => tensionFor(options, fundamentalHz, frequencyHz, otherTensionNPerM),
  }
}

function predict(options: DrumModelOptions, air: GroupAir[], at: PredictOptions): PredictedMode[] {
  requirePositive('tension', at.tensionNPerM)
  const otherTensionNPerM = at.otherTensionNPerM ?? at.tensionNPerM
  requirePositive('tension of the other head', otherTensionNPerM)
  const heads = [{ film: options.film, tensionNPerM: at.tensionNPerM }]
  if (options.geometry.construction === 'double-headed') heads.push({ film: options.otherFilm ?? options.film, tensionNPerM: otherTensionNPerM })
  const scale = at.airScale ?? options.airScale ?? DEFAULT_AIR_SCALE
  const modes: PredictedMode[] = []
  for (const group of air) {
    const m = group.basis.m
    if (at.nodalDiameters && !at.nodalDiameters.includes(m)) continue
    const state: GroupState = {
      heads,
      radiusM: options.geometry.radiusM,
      airDensityKgM3: options.air.densityKgM3,
      soundSpeedMPerS: options.air.soundSpeedMPerS,
      airScale: m === 0 ? scale.axisymmetric : scale.others,
      edgeFactor: at.edgeFactor ?? options.edgeFactor ?? DEFAULT_EDGE_FACTOR,
    }
    modes.push(...groupModes(group, state, { maxHz: at.maxHz ?? Infinity, rough: at.rough, airModes: at.airModes }))
  }
  return modes.sort((a, b) => a.frequencyHz - b.frequencyHz)
}

/** Bisection on ln T: a head's (0,1) rises with its tension. */
function tensionFor(options: DrumModelOptions, fundamentalHz: (t: number, other?: number) => number, wantedHz: number, other?: number): number {
  requirePositive('frequency', wantedHz)
  const { radiusM } = options.geometry
  const sigma = options.film.arealDensityKgM2
  const unit = idealFrequencyHz({ radiusM, arealDensityKgM2: sigma, tensionNPerM: 1 }, 0, 1)
  let low = (wantedHz / unit) ** 2 / 100
  let high = (wantedHz / unit) ** 2 * 30
  if (fundamentalHz(low, other) > wantedHz) throw new RangeError(`no tension gives ${wantedHz} Hz: the enclosed air alone holds the head higher`)
  if (fundamentalHz(high, other) < wantedHz) throw new RangeError(`no tension gives ${wantedHz} Hz while the other head stays as it is`)
  while (high / low > 1 + 1e-10) {
    const middle = Math.sqrt(low * high)
    if (fundamentalHz(middle, other) < wantedHz) low = middle
    else high = middle
  }
  return Math.sqrt(low * high)
}
