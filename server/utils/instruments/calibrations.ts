import type { CalibrationView } from '../../../shared/schemas/calibration'
import { USUAL_U95 } from '../../../shared/schemas/instrument'
import { COVERAGE_95 } from '../../../shared/schemas/weighing'
import type { HeadCalibration } from '../../../shared/types/reading'
import type { CalibrationRow } from '../../../db/rereading.table'
import type { DB, Kysely, Transaction } from '../core/db'

export interface CalibrationRecord extends CalibrationRow { by_name: string | null }

export function toCalibrationView(row: CalibrationRecord): CalibrationView {
  return {
    id: row.id, kind: row.kind, knownNPerM: row.known_n_per_m, knownU95NPerM: row.known_u95_n_per_m,
    sourceReadingId: row.source_reading_id, referenceReadingId: row.reference_reading_id,
    found: row.found as HeadCalibration, note: row.note, createdAt: row.created_at.toISOString(), byName: row.by_name,
  }
}

const calibrationRows = (db: Kysely<DB>) => db.selectFrom('calibrations').leftJoin('users', 'users.id', 'calibrations.created_by').selectAll('calibrations').select('users.name as by_name')

/** The calibrations that hold now of these heads. */
export async function listCalibrations(db: Kysely<DB>, headIds: string[]): Promise<CalibrationRecord[]> {
  if (!headIds.length) return []
  return calibrationRows(db).where('calibrations.head_id', 'in', headIds).where('calibrations.removed_at', 'is', null).execute()
}

/** The calibration that holds now of a head, if it has one. */
export const findCalibration = (db: Kysely<DB>, headId: string): Promise<CalibrationRecord | undefined> =>
  calibrationRows(db).where('calibrations.head_id', '=', headId).where('calibrations.removed_at', 'is', null).executeTakeFirst()

/** Any calibration, also one that was taken off since. */
export const findCalibrationById = (db: Kysely<DB>, id: string): Promise<CalibrationRecord | undefined> =>
  calibrationRows(db).where('calibrations.id', '=', id).executeTakeFirst()

/** Takes the calibrations of heads off; readings made with them keep their names. Returns how many there were. */
export async function endCalibrations(trx: Transaction<DB>, headIds: string[], { by, because, at }: { by: string, because: string, at: Date }): Promise<number> {
  if (!headIds.length) return 0
  const ended = await trx.updateTable('calibrations').set({ removed_by: by, removed_at: at, removed_because: because })
    .where('head_id', 'in', headIds).where('removed_at', 'is', null).executeTakeFirst()
  return Number(ended.numUpdatedRows)
}

/** Place of ln areal density among the five of HeadCalibration.covariance. */
const DENSITY = 3

/** The air and the edge are the instrument's and stay known; the film's areal density is the new one's, as stated. */
export async function moveCalibrationToNewFilm(trx: Transaction<DB>, { by_name: _name, id: _id, created_at: _at, ...row }: CalibrationRecord, film: { areal_density_kg_m2: number, areal_density_u95_kg_m2: number | null }, by: string, at: Date): Promise<void> {
  await endCalibrations(trx, [row.head_id], { by, because: 'a new film was mounted; the air\'s scale was kept', at })
  const found = row.found as HeadCalibration
  const value = film.areal_density_kg_m2
  const relative = (film.areal_density_u95_kg_m2 ?? USUAL_U95.arealDensity * value) / value / COVERAGE_95
  const size = Math.sqrt(found.covariance.length)
  const covariance = found.covariance.map((entry, i) => {
    const [line, column] = [Math.floor(i / size), i % size]
    if (line !== DENSITY && column !== DENSITY) return entry
    return line === column ? relative ** 2 : 0
  })
  await trx.insertInto('calibrations').values({ ...row, found: JSON.stringify({ ...found, arealDensityKgM2: { value, standard: relative * value }, covariance } satisfies HeadCalibration), created_at: at }).execute()
}
