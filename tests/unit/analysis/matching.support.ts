import { airAt, createDrumModel, strikeAmplitudes, type PredictedMode } from '../../../shared/acoustics'
import type { ExplainRequest } from '../../../server/utils/analysis/explanation'
import type { LineFindings, SpectralLine } from '../../../server/utils/analysis/lines'
import type { AnalysedHead, Construction } from '../../../server/utils/analysis/types'

/** Lines as a tap on a drum would give them, whose air, edge and evenness are not quite those that the analysis assumes. */
export interface LineCase {
  construction: Construction
  tensionNPerM: number
  otherTensionNPerM?: number
  /** Where the head was hit, r/R, and what the maker said. */
  x0: number
  strike?: 'centre' | 'edge'
  seed: number
  radiusM?: number
  depthM?: number
  airScale?: { axisymmetric: number, others: number }
  edgeFactor?: number
  /** Own relative error of each mode's frequency. */
  scatter?: number
  /** Modes that are not heard, as 'm,n'. */
  silent?: string[]
  /** Lines weaker than this are not found, dB. */
  floorDb?: number
  extra?: SpectralLine[]
}

export const film: AnalysedHead = {
  side: 'batter', material: 'pet', plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475,
}

/** Park and Miller's generator and the sum of twelve uniforms: the same numbers on every machine. */
function normals(seed: number): () => number {
  let state = seed * 7919 % 2147483647
  const uniform = () => {
    state = state * 16807 % 2147483647
    return state / 2147483647
  }
  return () => Array.from({ length: 12 }, uniform).reduce((sum, u) => sum + u, -6)
}

export function line(frequencyHz: number, levelDb: number, more: Partial<SpectralLine> = {}): SpectralLine {
  return { frequencyHz, standardErrorHz: 0.03, amplitude: 10 ** (levelDb / 20), levelDb, gammaPerS: 8, phaseRad: 0, steady: false, ...more }
}

export function requestOf(drum: LineCase): ExplainRequest {
  const { construction, radiusM = construction === 'kettle' ? 0.325 : 0.165, depthM = 0.2, strike = drum.x0 < 0.3 ? 'centre' : 'edge' } = drum
  return {
    instrument: {
      construction, radiusM, depthM, bowlVolumeM3: construction === 'kettle' ? 0.13 : undefined, rodCount: 8,
      heads: construction === 'double-headed' ? [film, { ...film, side: 'resonant', plyThicknessM: 190e-6, arealDensityKgM2: 0.264 }] : [film],
    },
    side: 'batter', strike, firstRod: 1, centreDamped: false, temperatureC: 20,
  }
}

export function findingsOf(drum: LineCase): LineFindings {
  const random = normals(drum.seed)
  const { instrument } = requestOf(drum)
  const { construction, radiusM, depthM, bowlVolumeM3, heads } = instrument
  const model = createDrumModel({ geometry: { construction, radiusM, depthM, bowlVolumeM3 }, film: heads[0]!, otherFilm: heads[1], air: airAt({ temperatureC: 20 }), airScale: drum.airScale, edgeFactor: drum.edgeFactor })
  const modes = model.predictModes({ tensionNPerM: drum.tensionNPerM, otherTensionNPerM: drum.otherTensionNPerM, maxHz: 1300 }).filter(mode => mode.m <= 6)
  const amplitudes = strikeAmplitudes({ modes, radiusM, arealDensityKgM2: film.arealDensityKgM2, strike: { radialPosition: drum.x0, contactRatio: 0.04, contactTimeS: 0.002 } })
  const heard = modes.map((mode, i) => ({ mode, loudness: 20 * Math.log10(Math.abs(amplitudes[i]!) * mode.frequencyHz ** 2 * Math.exp(-0.25 * mode.m) + 1e-30) + 4 * random() }))
    .filter(({ mode }) => !drum.silent?.includes(`${mode.m},${mode.n}`))
  const loudest = Math.max(...heard.map(h => h.loudness))
  const lines = heard.filter(h => h.loudness - loudest > (drum.floorDb ?? -30)).map(h => lineOf(h.mode, h.loudness - loudest, drum.scatter ?? 0.0005, random))
  return {
    lines: [...lines, ...(drum.extra ?? [])].sort((a, b) => a.frequencyHz - b.frequencyHz),
    fromHz: 40, toHz: 1500, detection: { stepHz: 10, levelDb: Array.from({ length: 147 }, () => drum.floorDb ?? -30) }, explainedShare: 0.98,
  }
}

function lineOf(mode: PredictedMode, levelDb: number, scatter: number, random: () => number): SpectralLine {
  const gammaPerS = mode.radiationDampingPerS + 2 + 0.02 * mode.frequencyHz
  const undamped = mode.frequencyHz * (1 + scatter * random()) + 0.03 * random()
  return line(Math.sqrt(undamped ** 2 - (gammaPerS / (2 * Math.PI)) ** 2), levelDb, { gammaPerS })
}
