import { z } from 'zod'
import { decodeCursor, encodeCursor, TIMESTAMP_TEXT } from '../core/cursor'
import type { ReadingSort } from './sorts'

/* A cursor names a row by its sort key as PostgreSQL writes it (a Date would lose its microseconds) and says where to go from there. */
const cursorSchema = z.object({
  /** The sort that it belongs to. */
  sort: z.string().max(20),
  direction: z.enum(['next', 'previous']),
  key: z.array(z.string().max(200)).min(2).max(4),
  /** Place of the row in the whole list, from 1; for 'rows 51 to 100', nothing rests on it. */
  position: z.int().min(0).max(1e9),
})
export type HistoryCursor = z.infer<typeof cursorSchema>

const texts = {
  timestamptz: TIMESTAMP_TEXT,
  float8: /^-?(\d+(\.\d+)?(e[+-]?\d+)?|Infinity)$/,
  // PostgreSQL keeps no NUL in a text and refuses one in a parameter.
  text: /^[^\0]*$/,
  uuid: /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/,
} as const

const STRANGE_CURSOR = { message: 'This place in the list does not fit it. Open the list from its start.', field: 'This cursor was not given out for this sort.' }

export const encodeHistoryCursor = (cursor: HistoryCursor): string => encodeCursor(cursor)

/** @throws DomainError bad-input for anything that encodeHistoryCursor did not make, and for a cursor of another sort */
export function decodeHistoryCursor(text: string, sortName: string, sort: ReadingSort): HistoryCursor {
  const ofThisSort = cursorSchema.refine(cursor => cursor.sort === sortName && cursor.key.length === sort.key.length
    && sort.key.every((part, index) => texts[part.type].test(cursor.key[index]!)))
  return decodeCursor(text, ofThisSort, STRANGE_CURSOR)
}
