import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { visibleTo } from '../instruments/access'
import { dropFile, type RecordingFolders } from './files'

/**
 * Takes a recording away, with its reading and its file.
 * @throws DomainError not-found; conflict when turns were made from its reading or taught by it
 */
export async function deleteRecording(db: Kysely<DB>, folders: RecordingFolders, id: string, by: Pick<SignedInUser, 'id' | 'role'>): Promise<void> {
  const filePath = await db.transaction().execute(async (trx) => {
    const recording = await trx.selectFrom('recordings').innerJoin('instruments', 'instruments.id', 'recordings.instrument_id')
      .select(['recordings.file_path', 'recordings.head_id']).where('recordings.id', '=', id).where(visibleTo(by)).forUpdate('recordings').executeTakeFirst()
    if (!recording) throw notFound('This recording')
    const used = await trx.selectFrom('turn_sheets').innerJoin('readings', join => join.on(eb => eb.or([
      eb('turn_sheets.reading_id', '=', eb.ref('readings.id')), eb('turn_sheets.next_reading_id', '=', eb.ref('readings.id')),
    ]))).select('turn_sheets.id').where('readings.recording_id', '=', id).where('turn_sheets.applied_at', 'is not', null).executeTakeFirst()
    if (used) throw new DomainError('conflict', 'Rods were turned by this reading, so it stays in the tuning history.')
    const calibrated = await trx.selectFrom('calibrations').innerJoin('readings', 'readings.id', 'calibrations.source_reading_id').select('calibrations.id')
      .where('readings.recording_id', '=', id).where('calibrations.removed_at', 'is', null).executeTakeFirst()
    if (calibrated) throw new DomainError('conflict', 'The head is calibrated by this recording. Take the calibration off first.')
    await trx.deleteFrom('recordings').where('id', '=', id).execute()
    await recordAudit(trx, { actor: by.id, action: 'recording-deleted', subjectType: 'recording', subjectId: id, detail: { headId: recording.head_id } })
    return recording.file_path
  })
  await dropFile(folders, filePath)
}
