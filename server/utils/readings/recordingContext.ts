import type { HeadRow } from '../../../db/instruments.table'
import type { RecordingRow } from '../../../db/readings.table'
import { findCalibrationById } from '../instruments/calibrations'
import type { DB, Kysely } from '../core/db'
import { DomainError } from '../core/errors'
import { getHeadContext, type HeadContext } from './headContext'

/** What the workshop itself may see: reading again changes nothing about who may ask for it. */
const WORKSHOP = { id: '', role: 'owner' } as const

/**
 * The drum of a recording as it is known now, with the films that were on it when the recording was made.
 * @throws DomainError conflict where a film's figures of that time were never kept
 */
export async function getRecordingContext(db: Kysely<DB>, recording: Pick<RecordingRow, 'head_id' | 'recorded_at'>): Promise<HeadContext> {
  const context = await getHeadContext(db, recording.head_id, WORKSHOP)
  const head = await filmAt(db, context.head, recording.recorded_at)
  const other = context.other && await filmAt(db, context.other, recording.recorded_at)
  const calibration = head.calibrationId === undefined ? context.calibration : head.calibrationId === null ? null : await findCalibrationById(db, head.calibrationId) ?? null
  return { ...context, head: head.row, other: other?.row ?? null, calibration }
}

/** A head with the film of a moment; `calibrationId` is the calibration of an earlier film, undefined while its film is still on. */
async function filmAt(db: Kysely<DB>, row: HeadRow, at: Date): Promise<{ row: HeadRow, calibrationId?: string | null }> {
  if (at >= row.film_since) return { row }
  const earlier = await db.selectFrom('earlier_films').select('figures').where('head_id', '=', row.id)
    .where('mounted_at', '<=', at).where('removed_at', '>', at).orderBy('removed_at', 'desc').executeTakeFirst()
  if (!earlier) throw new DomainError('conflict', 'This recording is older than the film that is on the head now, and the figures of the film of that time were not kept. Its reading stays as it is.')
  const { calibrationId, ...figures } = earlier.figures as Partial<HeadRow> & { calibrationId: string | null }
  return { row: { ...row, ...figures }, calibrationId }
}
