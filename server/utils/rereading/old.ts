import { sql, type SqlBool } from 'kysely'
import { ANALYSIS_VERSION } from '../analysis/version'
import type { DB, Kysely } from '../core/db'

/* A recording is old when its last analysis was by another version, or before a figure of its drum was changed. `c` is a recording, `h` its head. */

/** The film of that time is still on the head, or its figures were kept. */
const isKnown = sql<SqlBool>`(c.recorded_at >= h.film_since or exists (
  select 1 from earlier_films e where e.head_id = h.id and e.mounted_at <= c.recorded_at and e.removed_at > c.recorded_at))`
const byVersion = sql<SqlBool>`c.analysis_version is distinct from ${ANALYSIS_VERSION}`
/** An earlier film's figures do not change any more. */
const byFigures = sql<SqlBool>`(c.recorded_at >= h.film_since and c.analysed_at < h.figures_since)`

export const isOld = sql<SqlBool>`(${byVersion} or ${byFigures}) and ${isKnown}`

export interface OldRecordings { byVersion: number, byFigures: number, filmUnknown: number }

/** How many recordings would be read otherwise now, and why; `filmUnknown` cannot be read again at all. */
export async function countOldRecordings(db: Kysely<DB>): Promise<OldRecordings> {
  const { rows: [row] } = await sql<OldRecordings>`
    select count(*) filter (where ${byVersion} and ${isKnown}) as "byVersion",
      count(*) filter (where not (${byVersion}) and ${byFigures}) as "byFigures",
      count(*) filter (where ${byVersion} and not ${isKnown}) as "filmUnknown"
    from recordings c join heads h on h.id = c.head_id`.execute(db)
  return row!
}

/** The next recording of a run that is under way: the walk goes from new to old and meets each once. */
export async function findNextOld(db: Kysely<DB>, runId: string): Promise<string | undefined> {
  // The place stays in the database: a Date would lose PostgreSQL's microseconds. As scalars, so that an index serves.
  const place = (column: 'at_recorded' | 'at_id', start: string) => sql`(select coalesce(${sql.ref(column)}, ${sql.lit(start)}) from rereading_runs where id = ${runId})`
  const { rows: [row] } = await sql<{ id: string }>`
    select c.id from recordings c join heads h on h.id = c.head_id
    where ${isOld} and (c.recorded_at, c.id) < (${place('at_recorded', 'infinity')}, ${place('at_id', 'ffffffff-ffff-ffff-ffff-ffffffffffff')})
    order by c.recorded_at desc, c.id desc limit 1`.execute(db)
  return row?.id
}
