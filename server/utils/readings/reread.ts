import { readFile } from 'node:fs/promises'
import { join } from 'node:path'
import type { RereadRefusal } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import { analyseInWorker } from '../analysis/inWorker'
import { AnalysisTimeoutError } from '../analysis/pool'
import type { AnalysisOutcome } from '../analysis/types'
import { ANALYSIS_VERSION } from '../analysis/version'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import type { RecordingFolders } from './files'
import { getReading, getRecordingRow } from './find'
import { findNewestReading } from './newest'
import { getRecordingContext } from './recordingContext'
import { howStruck, toAnalysisRequest, tookTooLong } from './request'
import { insertReading } from './store'
import { outdatedBy } from './views'

/** What an analysis of a kept recording gave, and what it was made with. */
export interface Rereading { outcome: AnalysisOutcome, calibrationId: string | null, at: Date }

/**
 * Analyses a kept recording with the drum as it is known now. Stores nothing.
 * @param background  waits until no upload is being read
 * @throws DomainError conflict where the film of that time is unknown; not-found where the sound is gone
 */
export async function rereadSound(db: Kysely<DB>, folders: RecordingFolders, recording: RecordingRow, { background = false } = {}): Promise<Rereading> {
  const at = new Date()
  const context = await getRecordingContext(db, recording)
  const wav = await readFile(join(folders.recordings, recording.file_path)).catch(() => {
    throw notFound('The sound of this recording')
  })
  const outcome = await analyseInWorker(toAnalysisRequest(context, wav, howStruck(recording)), { background }).catch((error: unknown) => {
    throw error instanceof AnalysisTimeoutError ? tookTooLong() : error
  })
  return { outcome, calibrationId: context.calibration?.id ?? null, at }
}

/**
 * Keeps what reading again gave: a new reading takes the place of the recording's newest, which stays beside it. Where the
 * sound was refused, an earlier reading stays the newest, with a note of the refusal. The recording is locked, so two
 * readings at once cannot both be the newest.
 * @returns the new reading; null where there is none
 * @throws DomainError not-found when the recording went away meanwhile
 */
export async function storeRereading(trx: Transaction<DB>, recordingId: string, { outcome, calibrationId, at }: Rereading): Promise<ReadingRow | null> {
  const recording = await trx.selectFrom('recordings').selectAll().where('id', '=', recordingId).forUpdate().executeTakeFirst()
  if (!recording) throw notFound('This recording')
  const analysed = { analysis_version: ANALYSIS_VERSION, analysed_at: at }
  if (outcome.kind === 'read') {
    const before = await trx.updateTable('readings').set({ superseded_at: new Date() }).where('recording_id', '=', recordingId).where('superseded_at', 'is', null).returning('id').execute()
    const reading = await insertReading(trx, recording, outcome.reading, { calibrationId, at })
    if (before.length) await trx.updateTable('turn_sheets').set({ next_reading_id: reading.id }).where('next_reading_id', 'in', before.map(row => row.id)).execute()
    await trx.updateTable('recordings').set({ ...analysed, sound: JSON.stringify(outcome.sound), refusal_code: null, refusal_message: null, reread_refusal: null }).where('id', '=', recordingId).execute()
    return reading
  }
  const had = await trx.selectFrom('readings').select('id').where('recording_id', '=', recordingId).executeTakeFirst()
  const refusal: RereadRefusal = { version: ANALYSIS_VERSION, ...outcome.refusal }
  await trx.updateTable('recordings').set({
    ...analysed,
    ...(had ? { reread_refusal: JSON.stringify(refusal) } : { refusal_code: refusal.code, refusal_message: refusal.message }),
  }).where('id', '=', recordingId).execute()
  return null
}

/**
 * Reads one recording again now, for whoever may see it. Where neither the analysis nor the figures have changed since,
 * its newest reading is the answer and nothing is stored.
 * @throws DomainError not-found; conflict; unreadable-recording where it is refused now
 */
export async function readAgain(db: Kysely<DB>, folders: RecordingFolders, recordingId: string, user: Pick<SignedInUser, 'id' | 'role'>) {
  const recording = await getRecordingRow(db, recordingId, user)
  const newest = await findNewestReading(db, recordingId)
  if (newest && !await isOutdated(db, recording)) return { reading: await getReading(db, newest.id, user), changed: false }
  const rereading = await rereadSound(db, folders, recording)
  const stored = await db.transaction().execute(async (trx) => {
    const reading = await storeRereading(trx, recordingId, rereading)
    await recordAudit(trx, { actor: user.id, action: reading ? 'recording-read-again' : 'recording-refused-again', subjectType: 'recording', subjectId: recordingId, detail: { version: ANALYSIS_VERSION } })
    return reading
  })
  if (!stored) throw new DomainError('unreadable-recording', `${rereading.outcome.kind === 'refused' ? rereading.outcome.refusal.message : ''}${newest ? ' The earlier reading stays.' : ''}`)
  return { reading: await getReading(db, stored.id, user), changed: true }
}

async function isOutdated(db: Kysely<DB>, recording: RecordingRow): Promise<boolean> {
  const head = await db.selectFrom('heads').select(['film_since', 'figures_since']).where('id', '=', recording.head_id).executeTakeFirstOrThrow()
  return outdatedBy(recording, head) !== null
}
