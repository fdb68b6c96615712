import type { CalibrationBody } from '../../../shared/schemas/calibration'
import type { InstrumentView } from '../../../shared/schemas/instrument'
import { COVERAGE_95 } from '../../../shared/schemas/weighing'
import type { AnalysedReading, HeadCalibration, Measured } from '../../../shared/types/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { ReadingRow } from '../../../db/readings.table'
import { startAnalysis } from '../analysis/inWorker'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { getReadingRow, getRecordingRow } from '../readings/find'
import { getHeadContext, toAnalysedInstrument } from '../readings/headContext'
import { howStruck } from '../readings/request'
import { endCalibrations, findCalibration } from './calibrations'
import { getInstrument } from './find'

type Actor = Pick<SignedInUser, 'id' | 'role'>

/**
 * Calibrates a head by one of its readings at a tension that is known otherwise. An earlier calibration is taken off; older
 * readings keep their figures until they are read again.
 * @throws DomainError not-found, bad-input, conflict
 */
export async function calibrateHead(db: Kysely<DB>, headId: string, body: CalibrationBody, by: Actor): Promise<InstrumentView> {
  const context = await getHeadContext(db, headId, by)
  const source = await getReadingRow(db, body.readingId, by)
  refuseSource(source, headId, context.head.film_since)
  const known = body.kind === 'known' ? { value: body.nPerM, standard: body.u95NPerM / COVERAGE_95 } : await referenceTension(db, body.referenceReadingId, by)
  const struck = howStruck(await getRecordingRow(db, source.recording_id, by))
  const request = { ...struck, instrument: toAnalysedInstrument({ ...context, calibration: null }), side: context.head.side }
  const found = await learn(source, request, known)
  const at = new Date()
  await db.transaction().execute(async (trx) => {
    const head = await trx.selectFrom('heads').select(['id', 'figures_since']).where('id', '=', headId).forUpdate().executeTakeFirst()
    if (!head) throw notFound('This head')
    if (head.figures_since.getTime() !== context.head.figures_since.getTime()) throw new DomainError('conflict', 'The head\'s figures were changed meanwhile. Look at them and calibrate again.')
    await endCalibrations(trx, [headId], { by: by.id, because: 'a newer calibration took its place', at })
    await trx.updateTable('heads').set({ figures_since: at }).where('id', '=', headId).execute()
    const { id } = await trx.insertInto('calibrations').values({
      head_id: headId, kind: body.kind, known_n_per_m: known.value, known_u95_n_per_m: COVERAGE_95 * known.standard, source_reading_id: source.id,
      reference_reading_id: body.kind === 'reading' ? body.referenceReadingId : null, found: JSON.stringify(found), note: body.note || null, created_by: by.id, created_at: at,
    }).returning('id').executeTakeFirstOrThrow()
    await recordAudit(trx, { actor: by.id, action: 'head-calibrated', subjectType: 'head', subjectId: headId, detail: { calibrationId: id, readingId: source.id, knownNPerM: known.value } })
  })
  return getInstrument(db, context.instrument.id, by)
}

function refuseSource(source: ReadingRow, headId: string, filmSince: Date): void {
  const refuse = (message: string, field: string) => {
    throw new DomainError('bad-input', message, [{ path: 'readingId', message: field }])
  }
  if (source.head_id !== headId) refuse('Choose a reading of this head.', 'This reading is of another head.')
  if (source.taken_at < filmSince) refuse('Choose a reading of the film that is on the head now.', 'This reading is of an earlier film.')
  if (source.doubtful) refuse('This reading is doubtful, and a calibration would carry its doubt into all others. Tap the head again and choose that reading.', 'This reading is doubtful.')
}

async function referenceTension(db: Kysely<DB>, id: string, by: Actor): Promise<Measured> {
  const reference = await getReadingRow(db, id, by)
  if (reference.doubtful) throw new DomainError('bad-input', 'A doubtful reading is no reference.', [{ path: 'referenceReadingId', message: 'This reading is doubtful.' }])
  return { value: reference.tension_n_per_m, standard: reference.u95_n_per_m / COVERAGE_95 }
}

async function learn(source: ReadingRow, request: Parameters<ReturnType<typeof startAnalysis>['calibrate']>[0]['request'], tensionNPerM: Measured): Promise<HeadCalibration> {
  const { modes } = source.detail as AnalysedReading
  const tooFar = () => new DomainError('conflict', `This reading and ${tensionNPerM.value.toFixed(0)} N/m do not belong together: too few of its tones fit the head at that tension. Check the weight, the size and the film, or choose another reading.`)
  if (modes.length < 2) throw tooFar()
  try {
    return await startAnalysis().calibrate({ modes, request, tensionNPerM })
  } catch (error) {
    throw error instanceof RangeError ? tooFar() : error
  }
}

/** Takes the calibration of a head off; readings made with it keep their figures until they are read again. @throws DomainError not-found */
export async function removeCalibration(db: Kysely<DB>, headId: string, by: Actor): Promise<void> {
  await getHeadContext(db, headId, by)
  await db.transaction().execute(async (trx) => {
    await trx.selectFrom('heads').select('id').where('id', '=', headId).forUpdate().executeTakeFirst()
    const calibration = await findCalibration(trx, headId)
    if (!calibration) throw notFound('A calibration of this head')
    const at = new Date()
    await endCalibrations(trx, [headId], { by: by.id, because: 'taken off', at })
    await trx.updateTable('heads').set({ figures_since: at }).where('id', '=', headId).execute()
    await recordAudit(trx, { actor: by.id, action: 'head-calibration-removed', subjectType: 'head', subjectId: headId, detail: { calibrationId: calibration.id } })
  })
}
