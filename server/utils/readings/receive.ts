import { readFile, rm } from 'node:fs/promises'
import type { IncomingMessage } from 'node:http'
import { recordingFields, type RecordingAnswer, type RecordingFields } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import { analyseInWorker } from '../analysis/inWorker'
import { AnalysisTimeoutError } from '../analysis/pool'
import { RefusalError } from '../analysis/refusal'
import type { AnalysisOutcome } from '../analysis/types'
import type { DB, Kysely } from '../core/db'
import { DomainError } from '../core/errors'
import { parseInput } from '../core/parse'
import { ensureTempPath, type RecordingFolders } from './files'
import { getReading } from './find'
import { getHeadContext, type HeadContext } from './headContext'
import { toAnalysisRequest, tookTooLong } from './request'
import { isCentreDamped, storeAnalysedRecording } from './store'
import { type ReceivedUpload, receiveUpload } from './upload'
import { toRecordingView } from './views'

/**
 * An upload becomes a recording and, where the sound serves, a reading. A sound that was heard but cannot be read is kept
 * with its refusal; a file that is no recording at all leaves nothing behind.
 * @throws DomainError not-found, bad-input, wrong-media-type
 */
export async function receiveRecording(db: Kysely<DB>, folders: RecordingFolders, headId: string, request: IncomingMessage, user: SignedInUser): Promise<RecordingAnswer> {
  const context = await getHeadContext(db, headId, user)
  const tempPath = await ensureTempPath(folders)
  try {
    const upload = await receiveUpload(request, tempPath)
    const fields = parseInput(recordingFields, upload.fields)
    requireRods(fields, context.instrument.rod_count)
    return await analyseAndStore(db, folders, context, upload, fields, user)
  } catch (error) {
    if (error instanceof RefusalError) return nothingStored(context, error)
    throw error
  } finally {
    await rm(tempPath, { force: true })
  }
}

async function analyseAndStore(db: Kysely<DB>, folders: RecordingFolders, context: HeadContext, upload: ReceivedUpload, fields: RecordingFields, user: SignedInUser): Promise<RecordingAnswer> {
  const outcome = await analyse(context, fields, upload.tempPath)
  const result = outcome.kind === 'read' ? { kind: outcome.kind, reading: outcome.reading } : { kind: outcome.kind, refusal: outcome.refusal }
  if (result.kind === 'refused' && (!outcome.sound || result.refusal.code === 'not-wav')) throw new RefusalError(result.refusal.code, result.refusal.message)
  const stored = await storeAnalysedRecording(db, folders, { headId: context.head.id, fields, file: upload, sound: outcome.sound!, result, by: user.id, takenAt: new Date(), calibrationId: context.calibration?.id })
  return {
    recording: toRecordingView(stored.recording),
    reading: stored.reading ? await getReading(db, stored.reading.id, user) : null,
  }
}

async function analyse(context: HeadContext, fields: RecordingFields, path: string): Promise<AnalysisOutcome> {
  const request = toAnalysisRequest(context, await readFile(path), { ...fields, centreDamped: isCentreDamped(fields) })
  return analyseInWorker(request).catch((error: unknown) => {
    throw error instanceof AnalysisTimeoutError ? tookTooLong() : error
  })
}

function requireRods(fields: RecordingFields, rodCount: number): void {
  for (const path of ['rod', 'firstRod'] as const) {
    const rod = fields[path]
    if (rod === undefined || rod <= rodCount) continue
    const message = `This instrument has ${rodCount} rods.`
    throw new DomainError('bad-input', message, [{ path, message }])
  }
}

/** What is told of a file that was not kept. */
const nothingStored = ({ head, instrument }: HeadContext, refusal: RefusalError): RecordingAnswer =>
  ({ recording: { id: null, headId: head.id, instrumentId: instrument.id, refusal: refusal.toRefusal() }, reading: null })
