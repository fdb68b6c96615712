import { sql } from 'kysely'
import type { InstrumentHistoryView } from '../../../shared/schemas/instrument'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'
import { visibleTo } from './access'

/** More points than a chart has pixels; a drum read every day fills it in five years. */
const MAX_READINGS = 2000

/** The newest readings and applied turns of an instrument's heads, oldest first. @throws DomainError not-found */
export async function getInstrumentHistory(db: Kysely<DB>, id: string, user: Pick<SignedInUser, 'id' | 'role'>): Promise<InstrumentHistoryView> {
  const instrument = await db.selectFrom('instruments').select('instruments.id').where('instruments.id', '=', id).where(visibleTo(user)).executeTakeFirst()
  if (!instrument) throw notFound('This instrument')
  const [readings, turns] = await Promise.all([readingPoints(db, id), turnPoints(db, id)])
  return { readings: readings.reverse(), turns: turns.reverse() }
}

async function readingPoints(db: Kysely<DB>, instrumentId: string): Promise<InstrumentHistoryView['readings']> {
  const rows = await db.selectFrom('readings').innerJoin('heads', 'heads.id', 'readings.head_id').leftJoin('users', 'users.id', 'readings.taken_by')
    .select(['readings.id', 'readings.recording_id', 'readings.taken_at', 'readings.head_id', 'heads.side', 'readings.strike', 'readings.tension_n_per_m', 'readings.u95_n_per_m',
      'readings.fundamental_hz', 'readings.evenness_percent', 'readings.temperature_c', 'readings.doubtful', 'users.name as maker_name'])
    // Of a recording that was read again the newest reading stands for it.
    .where('readings.instrument_id', '=', instrumentId).where('readings.superseded_at', 'is', null)
    .orderBy('readings.taken_at', 'desc').orderBy('readings.id', 'desc').limit(MAX_READINGS).execute()
  return rows.map(row => ({
    id: row.id,
    recordingId: row.recording_id,
    takenAt: row.taken_at.toISOString(),
    headId: row.head_id,
    side: row.side,
    strike: row.strike,
    tension: { nPerM: row.tension_n_per_m, u95NPerM: row.u95_n_per_m },
    fundamentalHz: row.fundamental_hz,
    evennessPercent: row.evenness_percent,
    temperatureC: row.temperature_c,
    doubtful: row.doubtful,
    makerName: row.maker_name,
  }))
}

async function turnPoints(db: Kysely<DB>, instrumentId: string): Promise<InstrumentHistoryView['turns']> {
  const rows = await db.selectFrom('turn_sheets').innerJoin('heads', 'heads.id', 'turn_sheets.head_id').leftJoin('users', 'users.id', 'turn_sheets.applied_by')
    .select(['turn_sheets.id', 'turn_sheets.head_id', 'heads.side', 'turn_sheets.reading_id', 'turn_sheets.next_reading_id', 'users.name as by_name'])
    .select(sql<Date>`turn_sheets.applied_at`.as('applied_at'))
    // Rods that were not named were not turned, so the sum is shared among all of the sheet's rods.
    .select(sql<number>`(select coalesce(sum((rod->>'turns')::float8), 0) from jsonb_array_elements(turn_sheets.applied) rod) / jsonb_array_length(turn_sheets.sheet->'rods')`.as('mean_turns'))
    .select(sql<number>`(turn_sheets.sheet->'predicted'->>'tensionNPerM')::float8`.as('predicted_tension'))
    .where('turn_sheets.instrument_id', '=', instrumentId).where('turn_sheets.applied_at', 'is not', null)
    .orderBy('turn_sheets.applied_at', 'desc').orderBy('turn_sheets.id', 'desc').limit(MAX_READINGS).execute()
  return rows.map(row => ({
    id: row.id,
    headId: row.head_id,
    side: row.side,
    readingId: row.reading_id,
    nextReadingId: row.next_reading_id,
    appliedAt: row.applied_at.toISOString(),
    meanTurns: row.mean_turns,
    predictedTensionNPerM: row.predicted_tension,
    byName: row.by_name,
  }))
}
