/** From a simulated case to what the analysis takes, and from its answer to errors against the truth. */
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import type { AnalysedReading } from '../../../shared/types/reading'
import type { AnalysedHead, AnalysedInstrument, AnalysisOutcome, AnalysisRequest } from '../../../server/utils/analysis/types'
import { simulateTap, writeWav16 } from '../../support/drum'
import type { SimHead, SimResult, SimTap, SimTruth } from '../../support/drum'
import type { FilmKind, Place } from '../../support/drum/cases'

export function analysedHead(head: SimHead, side: 'batter' | 'resonant', film: FilmKind): AnalysedHead {
  return {
    side,
    material: film === 'skin' ? 'skin' : 'pet',
    plies: head.plies,
    plyThicknessM: head.plyThicknessM,
    filmDensityKgM3: head.filmDensityKgM3,
    modulusPa: head.modulusPa,
    poisson: head.poisson,
    yieldPa: film === 'skin' ? 40e6 : 100e6,
    arealDensityKgM2: head.arealDensityKgM2,
  }
}

export function analysedInstrument(tap: SimTap, rodCount: number, film: FilmKind): AnalysedInstrument {
  const { drum } = tap
  return {
    construction: drum.construction,
    radiusM: drum.radiusM,
    depthM: drum.depthM,
    bowlVolumeM3: drum.bowlVolumeM3,
    rodCount,
    heads: [analysedHead(drum.batter, 'batter', film), ...(drum.resonant ? [analysedHead(drum.resonant, 'resonant', 'pet')] : [])],
  }
}

/** The request that a maker would send for this tap; `nominal` differs from the drum where inputs are uncertain. */
export function requestFor(sound: SimResult, tap: SimTap, place: Place, rodCount: number, film: FilmKind, nominal = tap): AnalysisRequest {
  const rod = 1 + Math.round((tap.strike.angleRad ?? 0) / (2 * Math.PI / rodCount)) % rodCount
  return {
    wav: writeWav16(sound.samples, sound.sampleRateHz),
    instrument: analysedInstrument(nominal, rodCount, film),
    side: tap.strike.side ?? 'batter',
    strike: place === 'centre' ? 'centre' : 'edge',
    rod: place === 'centre' ? undefined : rod,
    firstRod: 1,
    centreDamped: tap.strike.centreDamped ?? false,
    temperatureC: nominal.drum.temperatureC ?? 20,
  }
}

export interface Judged {
  outcome: AnalysisOutcome
  truth: SimTruth
  reading?: AnalysedReading
  /** (read - true) / true. */
  tensionError?: number
  fundamentalError?: number
  inside95?: boolean
  ms: number
}

export async function judge(request: AnalysisRequest, truth: SimTruth): Promise<Judged> {
  const start = performance.now()
  const outcome = await analyseRecording(request)
  const ms = performance.now() - start
  if (outcome.kind === 'refused') return { outcome, truth, ms }
  const { reading } = outcome
  const off = reading.tension.nPerM - truth.tensionNPerM
  return {
    outcome, truth, reading, ms,
    tensionError: off / truth.tensionNPerM,
    // Where air or a second head splits (0,1), either branch may be called the fundamental.
    fundamentalError: truth.fundamentalBranchesHz.map(hz => reading.fundamentalHz / hz - 1).sort((a, b) => Math.abs(a) - Math.abs(b))[0],
    inside95: Math.abs(off) <= reading.tension.u95NPerM,
  }
}

/** Simulates one tap and reads it. */
export async function readTap(tap: SimTap, place: Place, rodCount = 8, film: FilmKind = 'pet'): Promise<Judged> {
  const sound = simulateTap(tap)
  return judge(requestFor(sound, tap, place, rodCount, film), sound.truth)
}

/** A reading in one line, for the message of a failing check. */
export function describeJudged(judged: Judged): string {
  const { outcome, truth } = judged
  const lines = truth.modes.filter(mode => mode.levelDb > -25).map(mode => `(${mode.m},${mode.n}) ${mode.hz.toFixed(1)}`).join(' ')
  if (outcome.kind === 'refused') return `refused ${outcome.refusal.code}; true lines ${lines}`
  const { reading } = outcome
  const modes = reading.modes.map(mode => `(${mode.m},${mode.n}) ${mode.measuredHz.toFixed(1)}`).join(' ')
  return `T ${reading.tension.nPerM.toFixed(0)} for ${truth.tensionNPerM.toFixed(0)} N/m, (0,1) ${reading.fundamentalHz.toFixed(2)} for ${truth.fundamentalHz.toFixed(2)} Hz`
    + `${reading.doubtful ? ', doubtful' : ''}, confidence ${reading.confidence.toFixed(2)}; read ${modes}; true ${lines}`
}
