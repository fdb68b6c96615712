import { airAt, createDrumModel, type HeadFilm } from '../../../shared/acoustics'
import type { HeadRow } from '../../../db/instruments.table'
import type { ReadingRow } from '../../../db/readings.table'
import type { AnalysedReading } from '../../../shared/types/reading'
import { type HeadContext, toAnalysedHead, toAnalysedInstrument } from '../readings/headContext'
import type { TurnSituation } from './advice'
import { type Kappa, KAPPA_PRIOR } from './kappa'
import { anchorPitch } from './pitch'
import type { RodKernelOptions } from './rodKernel'

export const kappaOf = (head: HeadRow): Kappa =>
  head.kappa === null || head.kappa_variance === null ? KAPPA_PRIOR : { value: head.kappa, variance: head.kappa_variance, passes: head.kappa_passes }

export function rodsOf({ instrument, head }: Pick<HeadContext, 'instrument' | 'head'>): Omit<RodKernelOptions, 'kappa'> {
  const film = toAnalysedHead(head)
  return {
    rodCount: instrument.rod_count,
    radiusM: instrument.diameter_mm / 2000,
    filmStiffnessNPerM: film.modulusPa * film.plies * film.plyThicknessM,
    poisson: film.poisson,
    threadPitchM: instrument.thread_pitch_mm / 1000,
  }
}

/** @param otherTensionNPerM  the other head's newest reading, where there is one */
export function situationOf(context: HeadContext, reading: ReadingRow, otherTensionNPerM: number | undefined): TurnSituation {
  const { instrument, head, other } = context
  const { construction, radiusM, depthM, bowlVolumeM3 } = toAnalysedInstrument(context)
  const film: HeadFilm = toAnalysedHead(head)
  const model = createDrumModel({
    geometry: { construction, radiusM, depthM, bowlVolumeM3 },
    film,
    ...(other && { otherFilm: toAnalysedHead(other) }),
    air: airAt({ temperatureC: reading.temperature_c }),
  })
  const detail = reading.detail as AnalysedReading
  const principal = detail.modes.find(mode => mode.m === 1 && mode.n === 1 && mode.head === undefined)
  return {
    construction: instrument.construction,
    reading: { tensionNPerM: reading.tension_n_per_m, doubtful: reading.doubtful, rods: detail.rim?.rods ?? null },
    film,
    material: head.material,
    rods: rodsOf(context),
    kappa: kappaOf(head),
    pitch: anchorPitch(model, { tensionNPerM: reading.tension_n_per_m, fundamentalHz: reading.fundamental_hz, principalHz: principal?.measuredHz }, otherTensionNPerM),
  }
}
