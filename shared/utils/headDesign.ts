import { airAt, createDrumModel, filmStress, filmThicknessM, type DrumConstruction, type DrumModel, type HeadFilm } from '../acoustics'

/** A film as the catalogue gives it. */
export interface DesignFilm {
  id: string
  name: string
  plies: number
  thicknessUm: number
  densityKgM3: number
  modulusGPa: number
  poisson: number
  yieldMPa: number
  arealDensityKgM2: number
}

/** The drum that a head is designed for; the workshop's fixture when only a diameter is known. */
export interface DesignDrum {
  construction: DrumConstruction
  diameterMm: number
  depthMm: number
  bowlVolumeL: number | null
  /** The other head of a double-headed drum. */
  otherFilm?: Omit<DesignFilm, 'id' | 'name'>
}

/** The partial that a pitch names: (0,1) where left out, or on a kettle the principal tone (1,1). */
export type DesignTone = 'fundamental' | 'principal'
export type DesignTarget = { kind: 'pitch', hz: number, of?: DesignTone } | { kind: 'tension', nPerM: number }

export interface HeadPrediction {
  tensionNPerM: number
  /** The head's (0,1); of two coupled heads the lowest. */
  fundamentalHz: number
  stressMPa: number
  shareOfYield: number
  modes: { m: number, n: number, hz: number }[]
}

export function toneOf(target: DesignTarget): DesignTone {
  return target.kind === 'pitch' ? target.of ?? 'fundamental' : 'fundamental'
}

/** Tension and pitch, of the tone asked for, between which a film serves on a drum. */
export interface DesignRange { lowestHz: number, highestHz: number, lowestNPerM: number, highestNPerM: number }

/**
 * Film creeps long before it yields, and a stroke adds to what it holds at rest: 60 % of yield is where advice ends
 * (common practice, no source).
 */
export const SAFE_SHARE_OF_YIELD = 0.6

/** Below 1 % of yield a head hangs in wrinkles and holds no pitch (common practice, no source). */
export const SLACK_SHARE_OF_YIELD = 0.01

/** Modes are shown up to this multiple of the lowest: what a player hears as the drum's tone lies below. */
const SHOWN_UP_TO = 4.2
const SHOWN_AT_MOST = 12

export function bareDiameterDrum(diameterMm: number): DesignDrum {
  return { construction: 'fixture', diameterMm, depthMm: 0, bowlVolumeL: null }
}

export function toHeadFilm(film: Omit<DesignFilm, 'id' | 'name'>): HeadFilm {
  return {
    plies: film.plies, plyThicknessM: film.thicknessUm * 1e-6, filmDensityKgM3: film.densityKgM3, modulusPa: film.modulusGPa * 1e9,
    poisson: film.poisson, yieldPa: film.yieldMPa * 1e6, arealDensityKgM2: film.arealDensityKgM2,
  }
}

export interface HeadDesign {
  range(): DesignRange
  /** What the head will be at the target. @throws RangeError when no tension at all sounds the wanted pitch */
  predict(target: DesignTarget): HeadPrediction
}

/** A head on a drum in the workshop's air, 20 deg C at half humidity. The same figures in the browser and on the server. */
export function createHeadDesign(drum: DesignDrum, designFilm: DesignFilm, tone: DesignTone = 'fundamental'): HeadDesign {
  const film = toHeadFilm(designFilm)
  const model = createDrumModel({
    geometry: {
      construction: drum.construction, radiusM: drum.diameterMm / 2000, depthM: drum.depthMm / 1000,
      ...(drum.bowlVolumeL != null && { bowlVolumeM3: drum.bowlVolumeL / 1000 }),
    },
    film,
    ...(drum.otherFilm && { otherFilm: toHeadFilm(drum.otherFilm) }),
    air: airAt({ temperatureC: 20, relativeHumidity: 0.5 }),
  })
  const lowestNPerM = SLACK_SHARE_OF_YIELD * film.yieldPa * filmThicknessM(film)
  const highestNPerM = SAFE_SHARE_OF_YIELD * film.yieldPa * filmThicknessM(film)
  const nodalDiameters = tone === 'principal' ? 1 : 0
  const toneHz = (tensionNPerM: number) => lowestModeHz(model, tensionNPerM, nodalDiameters)
  let range: DesignRange | undefined
  return {
    range: () => range ??= { lowestNPerM, highestNPerM, lowestHz: toneHz(lowestNPerM), highestHz: toneHz(highestNPerM) },
    predict: target => predictAt(model, film, target.kind === 'tension' ? target.nPerM : tensionForPitch(toneHz, target.hz, highestNPerM)),
  }
}

function predictAt(model: DrumModel, film: HeadFilm, tensionNPerM: number): HeadPrediction {
  const fundamentalHz = lowestModeHz(model, tensionNPerM, 0)
  const { stressPa, shareOfYield } = filmStress(film, tensionNPerM)
  const seen = new Set<string>()
  const modes = model.predictModes({ tensionNPerM, maxHz: fundamentalHz * SHOWN_UP_TO })
    .map(mode => ({ m: mode.m, n: mode.n, hz: mode.frequencyHz }))
    // Two coupled heads show each shape twice; the lower one is the struck head's and its mate moving together.
    .filter(({ m, n }) => !seen.has(`${m},${n}`) && seen.add(`${m},${n}`))
    .slice(0, SHOWN_AT_MOST)
  return { tensionNPerM, fundamentalHz, stressMPa: stressPa / 1e6, shareOfYield, modes }
}

/** The drum's lowest mode with m nodal diameters, Hz. With two heads both are taken at the same tension. */
function lowestModeHz(model: DrumModel, tensionNPerM: number, m: number): number {
  return model.predictModes({ tensionNPerM, nodalDiameters: [m] })[0]!.frequencyHz
}

/**
 * Tension at which the wanted tone sounds at `hz`, N/m: secant steps on ln f over ln T, kept between bounds that close in.
 * The slope is close to one half, so a few steps do.
 * @param startNPerM  the film's highest safe tension; a fifth of its slackest bounds the search below, because at still
 *                    less the layer that bends over the edge is as wide as the head and the model means nothing
 * @throws RangeError when the pitch lies outside what tensions from there to 1e3 times the start give
 */
function tensionForPitch(toneHz: (tensionNPerM: number) => number, hz: number, startNPerM: number): number {
  let low = Math.log(startNPerM * SLACK_SHARE_OF_YIELD / SAFE_SHARE_OF_YIELD / 5)
  let high = Math.log(startNPerM * 1e3)
  const miss = (lnTension: number) => Math.log(toneHz(Math.exp(lnTension)) / hz)
  if (!(hz > 0) || miss(low) > 0 || miss(high) < 0) throw new RangeError(`no tension sounds ${hz} Hz on this drum`)
  let at = Math.log(startNPerM)
  let missed = miss(at)
  let slope = 0.5
  for (let step = 0; step < 60 && Math.abs(missed) > 1e-9; step++) {
    if (missed > 0) high = at
    else low = at
    const wanted = at - missed / slope
    const next = wanted > low && wanted < high ? wanted : (low + high) / 2
    const missedNext = miss(next)
    const newSlope = (missedNext - missed) / (next - at)
    slope = newSlope > 0.05 && newSlope < 2 ? newSlope : 0.5
    at = next
    missed = missedNext
  }
  return Math.exp(at)
}
