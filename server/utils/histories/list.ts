import type { ReadingsPage, ReadingsQuery } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { countHistory } from './count'
import { decodeHistoryCursor, encodeHistoryCursor } from './cursor'
import { readFilters } from './filters'
import { type HistoryRow, selectHistoryRows } from './rows'
import { readSort } from './sorts'

/**
 * One page of the instrument history table; a customer sees the readings of own instruments only.
 * @throws DomainError bad-input for a cursor that was not given out for this sort
 */
export async function listHistory(db: Kysely<DB>, query: ReadingsQuery, user: Pick<SignedInUser, 'id' | 'role'>): Promise<ReadingsPage> {
  const sort = readSort(query)
  const filters = readFilters(query, user)
  const cursor = query.cursor ? decodeHistoryCursor(query.cursor, query.sort, sort) : undefined
  const backwards = cursor?.direction === 'previous'
  const offset = cursor ? 0 : ((query.page ?? 1) - 1) * query.limit
  const [walked, count] = await Promise.all([
    // One more than asked for says whether the walk could go on.
    selectHistoryRows(db, filters, { sort, backwards, limit: query.limit + 1, after: cursor?.key, offset }),
    countHistory(db, filters),
  ])
  const more = walked.length > query.limit
  const rows = walked.slice(0, query.limit)
  if (backwards) rows.reverse()

  const position = !rows.length ? 0 : !cursor ? offset + 1 : backwards ? Math.max(1, cursor.position - rows.length) : cursor.position + 1
  const at = (row: HistoryRow | undefined, direction: 'next' | 'previous', place: number) =>
    row ? encodeHistoryCursor({ sort: query.sort, direction, key: row.key, position: place }) : null
  const hasNext = backwards || more
  const hasPrevious = backwards ? more : Boolean(cursor) || offset > 0
  return {
    items: rows.map(row => row.view),
    ...count,
    position,
    next: hasNext ? at(rows.at(-1), 'next', position + rows.length - 1) : null,
    previous: hasPrevious ? at(rows[0], 'previous', position) : null,
  }
}
