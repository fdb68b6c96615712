import type { HeadRow, InstrumentRow } from '../../../db/instruments.table'
import type { CalibrationRow } from '../../../db/rereading.table'
import { COVERAGE_95 } from '../../../shared/schemas/weighing'
import type { HeadCalibration } from '../../../shared/types/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import { visibleTo } from '../instruments/access'
import { findCalibration } from '../instruments/calibrations'
import type { AnalysedHead, AnalysedInstrument } from '../analysis/types'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'

/** A head with the instrument that it belongs to, the instrument's other head, and the calibration that holds of it, if any. */
export interface HeadContext { instrument: InstrumentRow, head: HeadRow, other: HeadRow | null, calibration: CalibrationRow | null }

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getHeadContext(db: Kysely<DB>, headId: string, user: Pick<SignedInUser, 'id' | 'role'>): Promise<HeadContext> {
  const instrument = await db.selectFrom('instruments').innerJoin('heads', 'heads.instrument_id', 'instruments.id')
    .selectAll('instruments').where('heads.id', '=', headId).where(visibleTo(user)).executeTakeFirst()
  if (!instrument) throw notFound('This head')
  const heads = await db.selectFrom('heads').selectAll().where('instrument_id', '=', instrument.id).execute()
  const head = heads.find(row => row.id === headId)
  if (!head) throw notFound('This head')
  return { instrument, head, other: heads.find(row => row.id !== headId) ?? null, calibration: await findCalibration(db, headId) ?? null }
}

/** Rows in trade units become the analysis's SI; the struck head stands first. */
export function toAnalysedInstrument({ instrument, head, other, calibration }: HeadContext): AnalysedInstrument {
  const { diameter_u95_mm: diameterU95Mm } = instrument
  const { areal_density_u95_kg_m2: densityU95, areal_density_kg_m2: density } = head
  return {
    construction: instrument.construction,
    radiusM: instrument.diameter_mm / 2000,
    depthM: instrument.depth_mm / 1000,
    ...(instrument.bowl_volume_l !== null && { bowlVolumeM3: instrument.bowl_volume_l / 1000 }),
    rodCount: instrument.rod_count,
    heads: [head, ...(other ? [other] : [])].map(toAnalysedHead),
    ...((diameterU95Mm !== null || densityU95 !== null) && {
      uncertainty: {
        ...(diameterU95Mm !== null && { diameterMm: diameterU95Mm / COVERAGE_95 }),
        ...(densityU95 !== null && { arealDensityRelative: densityU95 / density / COVERAGE_95 }),
      },
    }),
    ...(calibration && { calibration: calibration.found as HeadCalibration }),
  }
}

export function toAnalysedHead(head: HeadRow): AnalysedHead {
  return {
    side: head.side,
    material: head.material,
    plies: head.plies,
    plyThicknessM: head.thickness_um * 1e-6,
    filmDensityKgM3: head.density_kg_m3,
    modulusPa: head.modulus_gpa * 1e9,
    poisson: head.poisson,
    yieldPa: head.yield_mpa * 1e6,
    arealDensityKgM2: head.areal_density_kg_m2,
  }
}
