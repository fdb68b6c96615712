import { createHash, randomUUID } from 'node:crypto'
import { writeFile } from 'node:fs/promises'
import type { RecordingFields } from '../../../shared/schemas/reading'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import type { AnalysedReading, Refusal, SoundFacts } from '../../../shared/types/reading'
import { ANALYSIS_VERSION } from '../analysis/version'
import type { DB, Kysely, Transaction } from '../core/db'
import { notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { closeTurnSheets } from '../turns/loop'
import { dropFile, ensureTempPath, keepFile, type RecordingFolders, recordingPath } from './files'

export interface StoredFile { tempPath: string, byteCount: number, sha256: string }

export interface AnalysedRecording {
  headId: string
  fields: RecordingFields
  file: StoredFile
  sound: SoundFacts
  /** Exactly one of the two, as the analysis gave it. */
  result: { kind: 'read', reading: AnalysedReading } | { kind: 'refused', refusal: Refusal }
  /** User id of whoever took it. */
  by: string | null
  takenAt: Date
  /** The calibration that it was read with. */
  calibrationId?: string | null
}

/**
 * Keeps a recording with its reading or its refusal: file and rows exist together or not at all. A sound reading also closes
 * the head's open turn sheet.
 * @throws DomainError not-found when the head went away meanwhile
 */
export async function storeAnalysedRecording(db: Kysely<DB>, folders: RecordingFolders, input: AnalysedRecording): Promise<{ recording: RecordingRow, reading: ReadingRow | null }> {
  const id = randomUUID()
  const filePath = recordingPath(id)
  try {
    return await db.transaction().execute(async (trx) => {
      // Two recordings of one head at once must not both close the same turn sheet.
      const head = await trx.selectFrom('heads').select(['id', 'instrument_id']).where('id', '=', input.headId).forUpdate().executeTakeFirst()
      if (!head) throw notFound('This head')
      const recording = await insertRecording(trx, input, { id, filePath, instrumentId: head.instrument_id })
      const reading = input.result.kind === 'read' ? await insertReading(trx, recording, input.result.reading, { calibrationId: input.calibrationId ?? null }) : null
      if (reading) await closeTurnSheets(trx, reading)
      await recordAudit(trx, { actor: input.by, action: reading ? 'reading-taken' : 'recording-refused', subjectType: 'recording', subjectId: id, detail: { headId: head.id } })
      await keepFile(folders, input.file.tempPath, filePath)
      return { recording, reading }
    })
  } catch (error) {
    await dropFile(folders, filePath)
    throw error
  }
}

function insertRecording(trx: Transaction<DB>, { fields, file, sound, result, by, takenAt, headId }: AnalysedRecording, own: { id: string, filePath: string, instrumentId: string }): Promise<RecordingRow> {
  return trx.insertInto('recordings').values({
    id: own.id,
    head_id: headId,
    instrument_id: own.instrumentId,
    uploaded_by: by,
    strike: fields.strike,
    rod: fields.rod ?? null,
    first_rod: fields.firstRod,
    centre_damped: isCentreDamped(fields),
    temperature_c: fields.temperatureC,
    note: fields.note || null,
    file_path: own.filePath,
    byte_count: file.byteCount,
    sha256: file.sha256,
    duration_s: sound.durationS,
    sample_rate_hz: sound.sampleRateHz,
    channels: sound.channels,
    private_to_maker: fields.privateToMaker,
    refusal_code: result.kind === 'refused' ? result.refusal.code : null,
    refusal_message: result.kind === 'refused' ? result.refusal.message : null,
    sound: JSON.stringify(sound),
    recorded_at: takenAt,
    analysis_version: ANALYSIS_VERSION,
  }).returningAll().executeTakeFirstOrThrow()
}

/** A reading of a recording, taken when and by whom the recording was. @param at  when the figures it was read with were taken */
export function insertReading(trx: Transaction<DB>, recording: RecordingRow, reading: AnalysedReading, { calibrationId, at }: { calibrationId: string | null, at?: Date }): Promise<ReadingRow> {
  return trx.insertInto('readings').values({
    recording_id: recording.id,
    head_id: recording.head_id,
    instrument_id: recording.instrument_id,
    taken_at: recording.recorded_at,
    taken_by: recording.uploaded_by,
    strike: recording.strike,
    temperature_c: recording.temperature_c,
    tension_n_per_m: reading.tension.nPerM,
    u95_n_per_m: reading.tension.u95NPerM,
    repeatability_u95_n_per_m: reading.tension.repeatabilityU95NPerM,
    fundamental_hz: reading.fundamentalHz,
    evenness_percent: reading.rim?.evennessPercent ?? null,
    confidence: reading.confidence,
    doubtful: reading.doubtful,
    detail: JSON.stringify(reading),
    analysis_version: reading.analysisVersion,
    calibration_id: calibrationId,
    ...(at && { created_at: at }),
  }).returningAll().executeTakeFirstOrThrow()
}

/** A finger rests on the centre for taps at the rim unless somebody says otherwise; a centre tap leaves no room for it. */
export const isCentreDamped = (fields: Pick<RecordingFields, 'strike' | 'centreDamped'>) => fields.centreDamped ?? fields.strike !== 'centre'

/** Puts bytes that never came as an upload (the demo's simulated taps) where storeAnalysedRecording takes them from. */
export async function stageRecording(folders: RecordingFolders, wav: Uint8Array): Promise<StoredFile> {
  const tempPath = await ensureTempPath(folders)
  await writeFile(tempPath, wav, { mode: 0o600 })
  return { tempPath, byteCount: wav.byteLength, sha256: createHash('sha256').update(wav).digest('hex') }
}
