import type { BothHeadsBody, BothHeadsLine, BothHeadsTap, BothHeadsView } from '../../../shared/schemas/bothHeads'
import type { AnalysedReading, BothHeadsReading, HeadSide } from '../../../shared/types/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import { startAnalysis } from '../analysis/inWorker'
import type { TappedReading } from '../analysis/matchingBoth'
import { ANALYSIS_VERSION } from '../analysis/version'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { visibleTo } from '../instruments/access'
import { recordAudit } from '../people/audit'
import { getReadingRow, getRecordingRow } from './find'
import { toAnalysedInstrument } from './headContext'
import { findNewestReading } from './newest'
import { getRecordingContext } from './recordingContext'
import { howStruck } from './request'

type Viewer = Pick<SignedInUser, 'id' | 'role'>

/** Taps farther apart than this belong to different states of the drum, ms. */
const LONGEST_APART_MS = 24 * 3600_000

/**
 * Reads both heads of a drum together from a reading of a tap on each.
 * @throws DomainError not-found, bad-input, conflict
 */
export async function readBothTogether(db: Kysely<DB>, body: BothHeadsBody, user: Viewer): Promise<BothHeadsView> {
  const batter = await getReadingRow(db, body.batterReadingId, user)
  const resonant = await getReadingRow(db, body.resonantReadingId, user)
  if (batter.instrument_id !== resonant.instrument_id) throw new DomainError('bad-input', 'Choose two readings of the same drum.', [{ path: 'resonantReadingId', message: 'This reading is of another drum.' }])
  if (Math.abs(batter.taken_at.getTime() - resonant.taken_at.getTime()) > LONGEST_APART_MS) {
    throw new DomainError('conflict', 'These taps are more than a day apart, and the heads may have moved in between. Tap both heads again, one after the other.')
  }
  const [atBatter, atResonant] = [await getRecordingRow(db, batter.recording_id, user), await getRecordingRow(db, resonant.recording_id, user)]
  const context = await getRecordingContext(db, atBatter)
  requireSides(context.head.side, context.instrument.construction, batter, resonant)
  const detail = await fit(toAnalysedInstrument(context), [tapped(batter, atBatter, 'batter'), tapped(resonant, atResonant, 'resonant')])
  const id = await db.transaction().execute(async (trx) => {
    const row = await trx.insertInto('joint_readings').values({
      instrument_id: batter.instrument_id, batter_recording_id: batter.recording_id, resonant_recording_id: resonant.recording_id,
      detail: JSON.stringify(detail), analysis_version: ANALYSIS_VERSION, created_by: user.id,
    }).returning('id').executeTakeFirstOrThrow()
    await recordAudit(trx, { actor: user.id, action: 'heads-read-together', subjectType: 'instrument', subjectId: batter.instrument_id, detail: { id: row.id } })
    return row.id
  })
  return getBothHeads(db, id, user)
}

function requireSides(batterSide: HeadSide, construction: string, batter: ReadingRow, resonant: ReadingRow): void {
  const refuse = (message: string, path: string) => {
    throw new DomainError('bad-input', message, [{ path, message }])
  }
  if (construction !== 'double-headed') refuse('Only a double-headed drum can be read from both heads.', 'batterReadingId')
  if (batterSide !== 'batter') refuse('Choose a reading of a tap on the batter head.', 'batterReadingId')
  if (batter.head_id === resonant.head_id) refuse('Choose a reading of a tap on the resonant head.', 'resonantReadingId')
}

function tapped(reading: ReadingRow, recording: RecordingRow, side: HeadSide): TappedReading {
  const { strike, centreDamped, temperatureC } = howStruck(recording)
  return { side, strike, centreDamped, temperatureC, reading: reading.detail as AnalysedReading }
}

async function fit(...[instrument, taps]: Parameters<ReturnType<typeof startAnalysis>['readBothHeads']>): Promise<BothHeadsReading> {
  if (taps.some(tap => !tap.reading.modes.length)) throw new DomainError('conflict', 'One of these readings names no mode, so it says too little of its head. Tap that head again.')
  return startAnalysis().readBothHeads(instrument, taps)
}

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getBothHeads(db: Kysely<DB>, id: string, user: Viewer): Promise<BothHeadsView> {
  const row = await db.selectFrom('joint_readings').innerJoin('instruments', 'instruments.id', 'joint_readings.instrument_id').leftJoin('users', 'users.id', 'joint_readings.created_by')
    .selectAll('joint_readings').select(['instruments.code', 'instruments.name', 'users.name as by_name']).where('joint_readings.id', '=', id).where(visibleTo(user)).executeTakeFirst()
  if (!row) throw notFound('This reading of both heads')
  return {
    ...row.detail as BothHeadsReading,
    id: row.id,
    instrument: { id: row.instrument_id, code: row.code, name: row.name },
    readAt: row.created_at.toISOString(),
    byName: row.by_name,
    taps: { batter: await tapOf(db, row.batter_recording_id), resonant: await tapOf(db, row.resonant_recording_id) },
    outdated: row.analysis_version !== ANALYSIS_VERSION,
  }
}

async function tapOf(db: Kysely<DB>, recordingId: string): Promise<BothHeadsTap> {
  const reading = await findNewestReading(db, recordingId)
  if (!reading) throw notFound('The reading of one of the taps')
  return { recordingId, readingId: reading.id, takenAt: reading.taken_at.toISOString(), strike: reading.strike, tension: { nPerM: reading.tension_n_per_m, u95NPerM: reading.u95_n_per_m } }
}

/** The newest readings of both heads of an instrument, one for each pair of taps. @throws DomainError not-found */
export async function listBothHeads(db: Kysely<DB>, instrumentId: string, user: Viewer): Promise<{ items: BothHeadsLine[] }> {
  const instrument = await db.selectFrom('instruments').select('instruments.id').where('instruments.id', '=', instrumentId).where(visibleTo(user)).executeTakeFirst()
  if (!instrument) throw notFound('This instrument')
  const rows = await db.selectFrom('joint_readings').selectAll().distinctOn(['batter_recording_id', 'resonant_recording_id']).where('instrument_id', '=', instrumentId)
    .orderBy('batter_recording_id').orderBy('resonant_recording_id').orderBy('created_at', 'desc').execute()
  const line = ({ id, created_at, detail }: typeof rows[number]): BothHeadsLine => {
    const { batter, resonant, doubtful } = detail as BothHeadsReading
    return { id, readAt: created_at.toISOString(), batter: { nPerM: batter.nPerM, u95NPerM: batter.u95NPerM }, resonant: { nPerM: resonant.nPerM, u95NPerM: resonant.u95NPerM }, doubtful }
  }
  return { items: rows.map(line).sort((a, b) => b.readAt.localeCompare(a.readAt)).slice(0, 20) }
}
