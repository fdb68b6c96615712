import { z } from 'zod'
import { DomainError } from '../core/errors'

/** Where a page ended: the moment as PostgreSQL writes it (a Date would lose its microseconds) and the id. */
const cursorSchema = z.object({ createdKey: z.string().regex(/^\d{4,6}-\d\d-\d\d \d\d:\d\d:\d\d(\.\d{1,6})?[+-]\d\d(:\d\d)?$/), id: z.uuid() })
export type ListCursor = z.infer<typeof cursorSchema>

export function encodeListCursor(cursor: ListCursor): string {
  return Buffer.from(JSON.stringify(cursor)).toString('base64url')
}

/** @throws DomainError bad-input for anything that encodeListCursor did not make */
export function decodeListCursor(text: string): ListCursor {
  try {
    return cursorSchema.parse(JSON.parse(Buffer.from(text, 'base64url').toString('utf8')))
  } catch {
    throw new DomainError('bad-input', 'This page address is broken. Open the list from its start.', [{ path: 'cursor', message: 'We did not give out this cursor.' }])
  }
}
