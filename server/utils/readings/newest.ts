import type { ReadingRow } from '../../../db/readings.table'
import type { DB, Kysely } from '../core/db'

/** The reading that stands for a recording in histories. */
export const findNewestReading = (db: Kysely<DB>, recordingId: string): Promise<ReadingRow | undefined> =>
  db.selectFrom('readings').selectAll().where('recording_id', '=', recordingId).where('superseded_at', 'is', null).orderBy('created_at', 'desc').limit(1).executeTakeFirst()
