import { type RawBuilder, sql } from 'kysely'
import type { ReadingRowView } from '../../../shared/schemas/reading'
import type { DB, Kysely } from '../core/db'
import type { HistoryFilters } from './filters'
import type { ReadingSort } from './sorts'

interface Row {
  id: string
  taken_at: Date
  instrument_id: string
  code: string
  name: string
  construction: string
  customer_id: string | null
  owner_name: string
  head_id: string
  side: ReadingRowView['side']
  strike: ReadingRowView['strike']
  tension_n_per_m: number
  u95_n_per_m: number
  fundamental_hz: number
  evenness_percent: number | null
  temperature_c: number
  confidence: number
  doubtful: boolean
  maker_name: string | null
  sort_key: string[]
}

export interface HistoryRow { view: ReadingRowView, key: string[] }

/** `after`: the sort key of the row to start behind. `offset` counts rows instead and so grows slow far down. */
export interface Slice { sort: ReadingSort, backwards: boolean, limit: number, after?: string[], offset?: number }

/** Rows in the order of the walk: backwards they come last row first. */
export async function selectHistoryRows(db: Kysely<DB>, filters: HistoryFilters, slice: Slice): Promise<HistoryRow[]> {
  const { sort } = slice
  const falling = sort.descending !== slice.backwards
  const conditions = [...filters.conditions, ...startBehind(slice, falling)]
  const order = sql.join(sort.key.map(part => sql`${part.expression} ${falling ? sql`desc` : sql`asc`}`))
  // The ids of the page come first, from an index where one serves; only those rows are then fetched and joined.
  const { rows } = await sql<Row>`
    with page as materialized (
      select r.id from readings r
        ${filters.needsInstruments || sort.instrumentParts ? sql`join instruments i on i.id = r.instrument_id` : sql``}
        ${filters.needsHeads ? sql`join heads h on h.id = r.head_id` : sql``}
      where ${conditions.length ? sql.join(conditions, sql` and `) : sql`true`}
      order by ${order} limit ${slice.limit} offset ${slice.offset ?? 0})
    select r.id, r.taken_at, r.instrument_id, i.code, i.name, i.construction, i.customer_id, i.owner_name, r.head_id, h.side, r.strike,
      r.tension_n_per_m, r.u95_n_per_m, r.fundamental_hz, r.evenness_percent, r.temperature_c, r.confidence, r.doubtful, maker.name as maker_name,
      array[${sql.join(sort.key.map(part => sql`(${part.expression})::text`))}] as sort_key
    from page
      join readings r on r.id = page.id
      join instruments i on i.id = r.instrument_id
      join heads h on h.id = r.head_id
      left join users maker on maker.id = r.taken_by
    order by ${order}`.execute(db)
  return rows.map(row => ({ view: toView(row), key: row.sort_key }))
}

function startBehind({ sort, after }: Slice, falling: boolean): RawBuilder<boolean>[] {
  if (!after) return []
  const compare = (count: number, operator: string) => sql<boolean>`
    (${sql.join(sort.key.slice(0, count).map(part => part.expression))}) ${sql.raw(operator)}
    (${sql.join(sort.key.slice(0, count).map((part, index) => sql`${after[index]}::${sql.raw(part.type)}`))})`
  return [
    compare(sort.key.length, falling ? '<' : '>'),
    // Implied by the line above, but only this one can be looked up in the index on instruments.
    ...(sort.instrumentParts ? [compare(sort.instrumentParts, falling ? '<=' : '>=')] : []),
  ]
}

function toView(row: Row): ReadingRowView {
  return {
    id: row.id, takenAt: row.taken_at.toISOString(),
    instrumentId: row.instrument_id, instrumentCode: row.code, instrumentName: row.name, construction: row.construction,
    ownerId: row.customer_id, ownerName: row.customer_id ? row.owner_name : null,
    headId: row.head_id, side: row.side, strike: row.strike,
    tension: { nPerM: row.tension_n_per_m, u95NPerM: row.u95_n_per_m },
    fundamentalHz: row.fundamental_hz, evennessPercent: row.evenness_percent,
    temperatureC: row.temperature_c, confidence: row.confidence, doubtful: row.doubtful, makerName: row.maker_name,
  }
}
