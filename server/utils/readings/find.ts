import type { ReadingView } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import { visibleTo } from '../instruments/access'
import { findCalibrationById } from '../instruments/calibrations'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { getHeadContext } from './headContext'
import { mayHear, toReadingView } from './views'

type Viewer = Pick<SignedInUser, 'id' | 'role'>

/** A recording read again twenty times has been looked at enough. */
const MOST_VERSIONS = 20

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getReadingRow(db: Kysely<DB>, id: string, user: Viewer): Promise<ReadingRow> {
  const row = await db.selectFrom('readings').innerJoin('instruments', 'instruments.id', 'readings.instrument_id')
    .selectAll('readings').where('readings.id', '=', id).where(visibleTo(user)).executeTakeFirst()
  if (!row) throw notFound('This reading')
  return row
}

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getReading(db: Kysely<DB>, id: string, user: Viewer): Promise<ReadingView> {
  const reading = await getReadingRow(db, id, user)
  const { instrument, head } = await getHeadContext(db, reading.head_id, user)
  const recording = await getRecordingRow(db, reading.recording_id, user)
  const [maker, others, calibration, together] = await Promise.all([
    reading.taken_by ? db.selectFrom('users').select('name').where('id', '=', reading.taken_by).executeTakeFirst() : undefined,
    db.selectFrom('readings').selectAll().where('recording_id', '=', recording.id).where('id', '!=', id).orderBy('created_at', 'desc').orderBy('id').limit(MOST_VERSIONS).execute(),
    reading.calibration_id ? findCalibrationById(db, reading.calibration_id) : undefined,
    db.selectFrom('joint_readings').select('id').where(eb => eb.or([eb('batter_recording_id', '=', recording.id), eb('resonant_recording_id', '=', recording.id)])).orderBy('created_at', 'desc').limit(1).executeTakeFirst(),
  ])
  return toReadingView({ reading, recording, head, instrument, makerName: maker?.name ?? null, others, calibration: calibration ?? null, togetherId: together?.id ?? null }, user)
}

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getRecordingRow(db: Kysely<DB>, id: string, user: Viewer): Promise<RecordingRow> {
  const row = await db.selectFrom('recordings').innerJoin('instruments', 'instruments.id', 'recordings.instrument_id')
    .selectAll('recordings').where('recordings.id', '=', id).where(visibleTo(user)).executeTakeFirst()
  if (!row) throw notFound('This recording')
  return row
}

/** A recording that this person may play. @throws DomainError not-found, not-allowed */
export async function getAudibleRecording(db: Kysely<DB>, id: string, user: Viewer): Promise<RecordingRow> {
  const row = await getRecordingRow(db, id, user)
  if (!mayHear(user, row)) throw new DomainError('not-allowed', 'This recording is private to the maker. Ask the maker if you need to hear it.')
  return row
}
