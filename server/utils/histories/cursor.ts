import { z } from 'zod'
import { DomainError } from '../core/errors'
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
  timestamptz: /^\d{4,6}-\d\d-\d\d \d\d:\d\d:\d\d(\.\d{1,6})?[+-]\d\d(:\d\d)?$/,
  float8: /^-?(\d+(\.\d+)?(e[+-]?\d+)?|Infinity)$/,
  // PostgreSQL keeps no NUL in a text and refuses one in a parameter.
  text: /^[^\0]*$/,
  uuid: /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/,
} as const

export function encodeHistoryCursor(cursor: HistoryCursor): string {
  return Buffer.from(JSON.stringify(cursor)).toString('base64url')
}

/** @throws DomainError bad-input for anything that encodeHistoryCursor did not make, and for a cursor of another sort */
export function decodeHistoryCursor(text: string, sortName: string, sort: ReadingSort): HistoryCursor {
  try {
    const cursor = cursorSchema.parse(JSON.parse(Buffer.from(text, 'base64url').toString('utf8')))
    const fits = cursor.sort === sortName && cursor.key.length === sort.key.length
      && sort.key.every((part, index) => texts[part.type].test(cursor.key[index]!))
    if (fits) return cursor
  } catch {
    // Falls through to the one refusal below.
  }
  throw new DomainError('bad-input', 'This place in the list does not fit it. Open the list from its start.', [{ path: 'cursor', message: 'This cursor was not given out for this sort.' }])
}
