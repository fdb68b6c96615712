import { sql } from 'kysely'
import type { DB, Kysely } from '../core/db'
import type { HistoryFilters } from './filters'

/**
 * The planner's cost up to which a count is run; about 50 ms on a small machine, some 200 000 rows of an index. Above it
 * the planner's estimate stands in, so that the page never waits for its total.
 */
const EXACT_COUNT_COST = 6_000

type Plan = [{ Plan: { 'Total Cost': number, 'Plan Rows': number } }]

/** How many rows the filters leave: exact where that is quick, else about. */
export async function countHistory(db: Kysely<DB>, filters: HistoryFilters): Promise<{ total: number } | { approximateTotal: number }> {
  const from = sql`
    from readings r
      ${filters.needsInstruments ? sql`join instruments i on i.id = r.instrument_id` : sql``}
      ${filters.needsHeads ? sql`join heads h on h.id = r.head_id` : sql``}
    where ${filters.conditions.length ? sql.join(filters.conditions, sql` and `) : sql`true`}`
  const plan = (await sql<{ 'QUERY PLAN': Plan }>`explain (format json) select r.id ${from}`.execute(db)).rows[0]?.['QUERY PLAN'][0]?.Plan
  if (plan && plan['Total Cost'] > EXACT_COUNT_COST) return { approximateTotal: roundEstimate(plan['Plan Rows']) }
  return { total: (await sql<{ total: number }>`select count(*) as total ${from}`.execute(db)).rows[0]!.total }
}

/** Two digits: an estimate supports no more. */
function roundEstimate(rows: number): number {
  const step = 10 ** Math.max(0, Math.floor(Math.log10(Math.max(rows, 1))) - 1)
  return Math.round(rows / step) * step
}
