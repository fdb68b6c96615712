import { type ExpressionBuilder, sql, type SqlBool } from 'kysely'
import { z } from 'zod'
import type { InstrumentQuery, InstrumentsPage, InstrumentView } from '../../../shared/schemas/instrument'
import type { SignedInUser } from '../../../shared/types/roles'
import type { HeadRow } from '../../../db/instruments.table'
import { decodeCursor, encodeCursor, TIMESTAMP_TEXT } from '../core/cursor'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'
import { containsPattern } from '../core/search'
import { visibleTo } from './access'
import { type CalibrationRecord, listCalibrations } from './calibrations'
import { type InstrumentRecord, toInstrumentView } from './views'

type Viewer = Pick<SignedInUser, 'id' | 'role'>

function instrumentRows(db: Kysely<DB>, user: Viewer) {
  return db.selectFrom('instruments').leftJoin('users as customer', 'customer.id', 'instruments.customer_id')
    .selectAll('instruments').select('customer.name as customer_name')
    .select(sql<InstrumentRecord['last']>`(
      select json_build_object('id', r.id, 'taken_at', r.taken_at, 'side', h.side, 'tension', r.tension_n_per_m, 'fundamental', r.fundamental_hz)
      from readings r join heads h on h.id = r.head_id where r.instrument_id = instruments.id and r.superseded_at is null order by r.taken_at desc, r.id desc limit 1)`.as('last'))
    .where(visibleTo(user))
}

/** Batter heads first, and the calibrations that hold of them. */
async function headsOf(db: Kysely<DB>, instrumentIds: string[]): Promise<[HeadRow[], CalibrationRecord[]]> {
  if (!instrumentIds.length) return [[], []]
  const heads = await db.selectFrom('heads').selectAll().where('instrument_id', 'in', instrumentIds).orderBy('side').execute()
  return [heads, await listCalibrations(db, heads.map(head => head.id))]
}

/** @throws DomainError not-found, also for what belongs to someone else */
export async function getInstrument(db: Kysely<DB>, id: string, user: Viewer): Promise<InstrumentView> {
  const row = await instrumentRows(db, user).where('instruments.id', '=', id).executeTakeFirst()
  if (!row) throw notFound('This instrument')
  return toInstrumentView(row, ...await headsOf(db, [id]))
}

/** Where a page ended. */
const cursorSchema = z.object({ createdKey: z.string().regex(TIMESTAMP_TEXT), id: z.uuid() })
const STRANGE_CURSOR = { message: 'This page address is broken. Open the list from its start.', field: 'We did not give out this cursor.' }

/** Newest first, in pages by cursor. @throws DomainError bad-input for a cursor that we did not give out */
export async function listInstruments(db: Kysely<DB>, query: InstrumentQuery, user: Viewer): Promise<InstrumentsPage> {
  const matches = matching(query.q)
  let page = instrumentRows(db, user).where(matches).select(sql<string>`instruments.created_at::text`.as('created_key'))
  if (query.cursor) {
    const { createdKey, id } = decodeCursor(query.cursor, cursorSchema, STRANGE_CURSOR)
    page = page.where(sql<SqlBool>`(instruments.created_at, instruments.id) < (${createdKey}::timestamptz, ${id}::uuid)`)
  }
  const [rows, counted] = await Promise.all([
    // One more than asked for says whether there is a next page.
    page.orderBy('instruments.created_at', 'desc').orderBy('instruments.id', 'desc').limit(query.limit + 1).execute(),
    db.selectFrom('instruments').where(visibleTo(user)).where(matches).select(eb => eb.fn.countAll<number>().as('total')).executeTakeFirstOrThrow(),
  ])
  const shown = rows.slice(0, query.limit)
  const heads = await headsOf(db, shown.map(row => row.id))
  const last = shown.at(-1)
  return {
    items: shown.map(row => toInstrumentView(row, ...heads)),
    total: counted.total,
    next: last && rows.length > query.limit ? encodeCursor({ createdKey: last.created_key, id: last.id }) : null,
  }
}

/** Words of number, name or owner. */
function matching(q: string | undefined) {
  return (eb: ExpressionBuilder<DB, 'instruments'>) => {
    if (!q) return sql<SqlBool>`true`
    const pattern = containsPattern(q)
    return eb.or([
      sql<SqlBool>`(instruments.code || ' ' || instruments.name) ilike ${pattern}`,
      eb.exists(eb.selectFrom('users').select('users.id').whereRef('users.id', '=', 'instruments.customer_id').where('users.name', 'ilike', pattern)),
    ])
  }
}
