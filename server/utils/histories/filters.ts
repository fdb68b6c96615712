import { type RawBuilder, sql, type SqlBool } from 'kysely'
import type { ReadingsQuery } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import { containsPattern } from '../core/search'

type Condition = RawBuilder<SqlBool>

/** What the query asks of the readings (`r`), and of instruments (`i`) and heads (`h`) where a count must join them for it. */
export interface HistoryFilters { conditions: Condition[], needsInstruments: boolean, needsHeads: boolean }

export function readFilters(query: ReadingsQuery, user: Pick<SignedInUser, 'id' | 'role'>): HistoryFilters {
  const instrument: Condition[] = []
  const head: Condition[] = []
  // Of a recording that was read again the newest reading stands for it.
  const reading: Condition[] = [sql`r.superseded_at is null`]

  if (user.role === 'customer') instrument.push(sql`i.customer_id = ${user.id}::uuid`)
  if (query.customerId) instrument.push(sql`i.customer_id = ${query.customerId}::uuid`)
  if (query.construction) instrument.push(sql`i.construction = ${query.construction}`)
  for (const word of words(query.q)) instrument.push(sql`(i.code || ' ' || i.name || ' ' || i.owner_name) ilike ${word}`)

  // No such head exists (instrumentBody); said here, because PostgreSQL would look through every reading to find none.
  if (query.side === 'resonant' && query.construction && query.construction !== 'double-headed') head.push(sql`false`)
  if (query.side) head.push(sql`h.side = ${query.side}`)

  if (query.instrumentId) reading.push(sql`r.instrument_id = ${query.instrumentId}::uuid`)
  if (query.headId) reading.push(sql`r.head_id = ${query.headId}::uuid`)
  if (query.takenBy) reading.push(sql`r.taken_by = ${query.takenBy}::uuid`)
  if (query.doubtful !== undefined) reading.push(query.doubtful ? sql`r.doubtful` : sql`not r.doubtful`)
  // Days are days of UTC, as the table shows them; `to` is a day that still counts.
  if (query.from) reading.push(sql`r.taken_at >= ${query.from}::date::timestamp at time zone 'UTC'`)
  if (query.to) reading.push(sql`r.taken_at < (${query.to}::date + 1)::timestamp at time zone 'UTC'`)
  if (query.minTension !== undefined) reading.push(sql`r.tension_n_per_m >= ${query.minTension}`)
  if (query.maxTension !== undefined) reading.push(sql`r.tension_n_per_m <= ${query.maxTension}`)
  if (query.minHz !== undefined) reading.push(sql`r.fundamental_hz >= ${query.minHz}`)
  if (query.maxHz !== undefined) reading.push(sql`r.fundamental_hz <= ${query.maxHz}`)
  return { conditions: [...instrument, ...head, ...reading], needsInstruments: instrument.length > 0, needsHeads: head.length > 0 }
}

/** Every word must stand in the number, name or owner. % and _ are letters like others; more than eight words say nothing more. */
function words(q: string | undefined): string[] {
  return (q ?? '').replaceAll('\0', '').split(/\s+/).filter(Boolean).slice(0, 8).map(containsPattern)
}
