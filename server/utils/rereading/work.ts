import { sql } from 'kysely'
import { ANALYSIS_VERSION } from '../analysis/version'
import { getConfig } from '../core/config'
import { type DB, type Kysely, useDb } from '../core/db'
import { enqueue } from '../core/jobs'
import { log } from '../core/log'
import { recordingFolders, type RecordingFolders } from '../readings/files'
import { rereadSound, type Rereading, storeRereading } from '../readings/reread'
import { findNextOld } from './old'

/** One job works this long and hands on to the next, so that a stop of the server waits for one recording at most. */
const JOB_MS = 5_000

type Outcome = 'read' | 'refused' | 'failed'

/**
 * Works on a run for a few seconds, then queues the next job of it. Each recording and its place in the walk are stored
 * together: after a crash the walk goes on where it was, and none is read twice or counted twice.
 */
export async function workOnRereading(id: string): Promise<void> {
  const db = useDb()
  const folders = recordingFolders(getConfig().dataDir)
  const until = Date.now() + JOB_MS
  while (Date.now() < until) {
    if (!await isOpen(db, id)) return
    const recordingId = await findNextOld(db, id)
    if (!recordingId) {
      await db.updateTable('rereading_runs').set({ finished_at: new Date() }).where('id', '=', id).where('cancelled_at', 'is', null).execute()
      return
    }
    await readOne(db, folders, id, recordingId)
  }
  await db.transaction().execute(trx => enqueue(trx, 'rereading', { id }))
}

async function isOpen(db: Kysely<DB>, id: string): Promise<boolean> {
  const run = await db.selectFrom('rereading_runs').select('version').where('id', '=', id).where('finished_at', 'is', null).where('cancelled_at', 'is', null).executeTakeFirst()
  return run !== undefined
}

async function readOne(db: Kysely<DB>, folders: RecordingFolders, id: string, recordingId: string): Promise<void> {
  const recording = await db.selectFrom('recordings').selectAll().where('id', '=', recordingId).executeTakeFirst()
  if (!recording) return
  let rereading: Rereading | undefined
  try {
    rereading = await rereadSound(db, folders, recording, { background: true })
  } catch (error) {
    // A recording that cannot be read at all must not hold up the others. Where the database is at fault, what follows fails too, and the job is tried again.
    log.warn({ recordingId, err: error }, 'recording not read again')
  }
  await db.transaction().execute(async (trx) => {
    const still = await trx.selectFrom('recordings').select('id').where('id', '=', recordingId).forUpdate().executeTakeFirst()
    // Removed meanwhile: the walk goes on from the next, and it counts for nothing.
    if (!still) return
    const outcome: Outcome = !rereading ? 'failed' : await storeRereading(trx, recordingId, rereading) ? 'read' : 'refused'
    if (!rereading) await trx.updateTable('recordings').set({ analysis_version: ANALYSIS_VERSION, analysed_at: new Date() }).where('id', '=', recordingId).execute()
    await sql`
      update rereading_runs set ${sql.ref(outcome)} = ${sql.ref(outcome)} + 1, at_recorded = c.recorded_at, at_id = c.id
      from recordings c where rereading_runs.id = ${id} and c.id = ${recordingId}`.execute(trx)
  })
}

/** After a start of the server: a run that was under way goes on. */
export async function resumeRereading(): Promise<void> {
  const db = useDb()
  const open = await db.selectFrom('rereading_runs').select('id').where('finished_at', 'is', null).where('cancelled_at', 'is', null).executeTakeFirst()
  if (open) await db.transaction().execute(trx => enqueue(trx, 'rereading', { id: open.id }))
}
