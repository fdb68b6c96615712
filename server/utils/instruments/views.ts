import type { HeadView, InstrumentView } from '../../../shared/schemas/instrument'
import type { HeadRow, InstrumentRow } from '../../../db/instruments.table'

export interface InstrumentRecord extends InstrumentRow {
  customer_name: string | null
  last: { id: string, taken_at: string, side: 'batter' | 'resonant', tension: number, fundamental: number } | null
}

export function toHeadView(row: HeadRow): HeadView {
  return {
    id: row.id,
    side: row.side,
    filmId: row.film_id,
    film: {
      material: row.material, plies: row.plies, thicknessUm: row.thickness_um, densityKgM3: row.density_kg_m3,
      modulusGPa: row.modulus_gpa, poisson: row.poisson, yieldMPa: row.yield_mpa,
    },
    arealDensityKgM2: row.areal_density_kg_m2,
    coating: row.coating,
    learned: row.kappa === null ? null : { kappa: row.kappa, passes: row.kappa_passes },
  }
}

export function toInstrumentView(row: InstrumentRecord, heads: HeadRow[]): InstrumentView {
  return {
    id: row.id,
    code: row.code,
    name: row.name,
    construction: row.construction,
    diameterMm: row.diameter_mm,
    depthMm: row.depth_mm,
    bowlVolumeL: row.bowl_volume_l,
    rodCount: row.rod_count,
    threadPitchMm: row.thread_pitch_mm,
    hoop: row.hoop,
    note: row.note,
    customerId: row.customer_id,
    customerName: row.customer_name,
    createdAt: row.created_at.toISOString(),
    heads: heads.filter(head => head.instrument_id === row.id).map(toHeadView),
    lastReading: row.last && {
      // PostgreSQL's own text of the moment, from inside a JSON object.
      id: row.last.id, takenAt: new Date(row.last.taken_at).toISOString(), side: row.last.side, tensionNPerM: row.last.tension, fundamentalHz: row.last.fundamental,
    },
  }
}
