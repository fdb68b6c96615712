import type { HeadView, InstrumentView } from '../../../shared/schemas/instrument'
import type { FilmWeighingInput } from '../../../shared/schemas/weighing'
import type { HeadRow, InstrumentRow } from '../../../db/instruments.table'
import { type CalibrationRecord, toCalibrationView } from './calibrations'

export interface InstrumentRecord extends InstrumentRow {
  customer_name: string | null
  last: { id: string, taken_at: string, side: 'batter' | 'resonant', tension: number, fundamental: number } | null
}

export function toHeadView(row: HeadRow, calibration?: CalibrationRecord): HeadView {
  return {
    id: row.id,
    side: row.side,
    filmId: row.film_id,
    film: {
      material: row.material, plies: row.plies, thicknessUm: row.thickness_um, densityKgM3: row.density_kg_m3,
      modulusGPa: row.modulus_gpa, poisson: row.poisson, yieldMPa: row.yield_mpa,
    },
    arealDensityKgM2: row.areal_density_kg_m2,
    arealDensityU95KgM2: row.areal_density_u95_kg_m2,
    weighing: row.weighing as FilmWeighingInput | null,
    coating: row.coating,
    calibration: calibration ? toCalibrationView(calibration) : null,
    learned: row.kappa === null ? null : { kappa: row.kappa, passes: row.kappa_passes },
  }
}

export function toInstrumentView(row: InstrumentRecord, heads: HeadRow[], calibrations: CalibrationRecord[]): InstrumentView {
  return {
    id: row.id,
    code: row.code,
    name: row.name,
    construction: row.construction,
    diameterMm: row.diameter_mm,
    diameterU95Mm: row.diameter_u95_mm,
    depthMm: row.depth_mm,
    bowlVolumeL: row.bowl_volume_l,
    rodCount: row.rod_count,
    threadPitchMm: row.thread_pitch_mm,
    hoop: row.hoop,
    note: row.note,
    customerId: row.customer_id,
    customerName: row.customer_name,
    createdAt: row.created_at.toISOString(),
    heads: heads.filter(head => head.instrument_id === row.id).map(head => toHeadView(head, calibrations.find(calibration => calibration.head_id === head.id))),
    lastReading: row.last && {
      // PostgreSQL's own text of the moment, from inside a JSON object.
      id: row.last.id, takenAt: new Date(row.last.taken_at).toISOString(), side: row.last.side, tensionNPerM: row.last.tension, fundamentalHz: row.last.fundamental,
    },
  }
}
