import type { AppliedBody, RodTurns, TurnSheetBody, TurnSheetView, TurnTarget } from '../../../shared/schemas/turnSheet'
import type { SignedInUser } from '../../../shared/types/roles'
import type { HeadRow } from '../../../db/instruments.table'
import type { ReadingRow, TurnSheetRow } from '../../../db/readings.table'
import { visibleTo } from '../instruments/access'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { getReadingRow } from '../readings/find'
import { getHeadContext } from '../readings/headContext'
import { adviseTurns, type TurnAdvice, type TurnGoal, type TurnSituation } from './advice'
import { situationOf } from './situation'

type Actor = Pick<SignedInUser, 'id' | 'role'>

/**
 * Makes a turn sheet from a reading to a target.
 * @param at  when it was made (the demo places it in the past)
 * @throws DomainError not-found; bad-input for what cannot be reached; conflict where a round is missing
 */
export async function createTurnSheet(db: Kysely<DB>, { readingId, target }: TurnSheetBody, by: Actor, at = new Date()): Promise<TurnSheetView> {
  const reading = await getReadingRow(db, readingId, by)
  const context = await getHeadContext(db, reading.head_id, by)
  refuseStale(reading, context.head)
  const situation = situationOf(context, reading, await otherTension(db, context.other?.id, reading.taken_at))
  const advice = adviseTurns(situation, await goalOf(db, target, situation, reading.head_id, by))
  const row = await db.transaction().execute(async (trx) => {
    const sheet = await trx.insertInto('turn_sheets').values({
      head_id: reading.head_id, instrument_id: reading.instrument_id, reading_id: reading.id, target: JSON.stringify(target), sheet: JSON.stringify(advice),
      applied: null, applied_at: null, applied_by: null, next_reading_id: null, created_by: by.id, created_at: at,
    }).returningAll().executeTakeFirstOrThrow()
    await recordAudit(trx, { actor: by.id, action: 'turn-sheet-made', subjectType: 'turn-sheet', subjectId: sheet.id, detail: { readingId, target } })
    return sheet
  })
  return toTurnSheetView(row)
}

function refuseStale(reading: ReadingRow, head: HeadRow): void {
  if (reading.superseded_at) throw new DomainError('conflict', 'This recording has been read again since. Start from its newest reading.')
  if (reading.taken_at < head.film_since) throw new DomainError('conflict', 'The head has a new film since this reading. Tap it again first.')
  if (reading.created_at < head.figures_since) throw new DomainError('conflict', 'The figures of the head or the instrument have changed since this reading. Read it again, or tap it again, first.')
}

async function goalOf(db: Kysely<DB>, target: TurnTarget, { pitch }: TurnSituation, headId: string, by: Actor): Promise<TurnGoal> {
  if (target.kind === 'even') return { kind: 'even' }
  if (target.kind === 'tension') return { kind: 'mean', tensionNPerM: target.nPerM }
  if (target.kind === 'pitch') return { kind: 'mean', tensionNPerM: pitch.tensionFor(target.hz, target.of ?? 'fundamental') }
  const earlier = await getReadingRow(db, target.readingId, by)
  if (earlier.head_id !== headId) throw new DomainError('bad-input', 'Choose an earlier reading of the same head.', [{ path: 'target.readingId', message: 'This reading is of another head.' }])
  return { kind: 'mean', tensionNPerM: earlier.tension_n_per_m }
}

/** Newest sound reading of the instrument's other head up to a moment, N/m. */
async function otherTension(db: Kysely<DB>, otherHeadId: string | undefined, until: Date): Promise<number | undefined> {
  if (!otherHeadId) return undefined
  const row = await db.selectFrom('readings').innerJoin('heads', 'heads.id', 'readings.head_id').select('readings.tension_n_per_m')
    .where('readings.head_id', '=', otherHeadId).where('readings.superseded_at', 'is', null).where('readings.doubtful', '=', false).where('readings.taken_at', '<=', until)
    .whereRef('readings.taken_at', '>=', 'heads.film_since').orderBy('readings.taken_at', 'desc').limit(1).executeTakeFirst()
  return row?.tension_n_per_m
}

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getTurnSheet(db: Kysely<DB>, id: string, user: Actor): Promise<TurnSheetView> {
  const row = await db.selectFrom('turn_sheets').innerJoin('instruments', 'instruments.id', 'turn_sheets.instrument_id')
    .selectAll('turn_sheets').where('turn_sheets.id', '=', id).where(visibleTo(user)).executeTakeFirst()
  if (!row) throw notFound('This turn sheet')
  return toTurnSheetView(row)
}

/**
 * Writes down what was really turned; may be corrected until the next reading has closed the loop.
 * @param at  when it was turned (the demo places it in the past)
 * @throws DomainError not-found; bad-input for a rod that is not there; conflict once the loop is closed
 */
export async function applyTurnSheet(db: Kysely<DB>, id: string, { rods }: AppliedBody, by: Actor, at = new Date()): Promise<TurnSheetView> {
  const row = await db.transaction().execute(async (trx) => {
    const sheet = await trx.selectFrom('turn_sheets').innerJoin('instruments', 'instruments.id', 'turn_sheets.instrument_id')
      .selectAll('turn_sheets').where('turn_sheets.id', '=', id).where(visibleTo(by)).forUpdate('turn_sheets').executeTakeFirst()
    if (!sheet) throw notFound('This turn sheet')
    if (sheet.next_reading_id) throw new DomainError('conflict', 'The head has been tapped again since: what was turned is settled. Make a new sheet from the new reading.')
    const count = (sheet.sheet as TurnAdvice).rods.length
    const stranger = rods.find(rod => rod.rod > count)
    if (stranger) throw new DomainError('bad-input', `This instrument has ${count} rods.`, [{ path: `rods.${rods.indexOf(stranger)}.rod`, message: `There is no rod ${stranger.rod}.` }])
    const applied = await trx.updateTable('turn_sheets').set({ applied: JSON.stringify(rods), applied_at: at, applied_by: by.id })
      .where('id', '=', id).returningAll().executeTakeFirstOrThrow()
    await recordAudit(trx, { actor: by.id, action: 'turns-applied', subjectType: 'turn-sheet', subjectId: id, detail: { rods } })
    return applied
  })
  return toTurnSheetView(row)
}

function toTurnSheetView(row: TurnSheetRow): TurnSheetView {
  const { rods, order, predicted, goal, filmStress, cautions, remainingPasses } = row.sheet as TurnAdvice
  return {
    id: row.id,
    readingId: row.reading_id,
    headId: row.head_id,
    instrumentId: row.instrument_id,
    createdAt: row.created_at.toISOString(),
    target: row.target as TurnTarget,
    rods, order, predicted, goal, filmStress, cautions, remainingPasses,
    applied: row.applied as RodTurns[] | null,
    appliedAt: row.applied_at?.toISOString() ?? null,
    nextReadingId: row.next_reading_id,
  }
}
