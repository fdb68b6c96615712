import type { z } from 'zod'
import { DomainError } from './errors'

/* A cursor names the row where a page ended, as text that a client hands back unread. It is input like any other: each list says by its schema what its own look like. */

export const encodeCursor = (cursor: unknown): string => Buffer.from(JSON.stringify(cursor)).toString('base64url')

/** What a list says of a cursor that it did not give out: to the person, and beside the field. */
export interface CursorRefusal { message: string, field: string }

/** @throws DomainError bad-input for anything that does not fit the schema */
export function decodeCursor<T>(text: string, schema: z.ZodType<T>, refusal: CursorRefusal): T {
  try {
    return schema.parse(JSON.parse(Buffer.from(text, 'base64url').toString('utf8')))
  } catch {
    throw new DomainError('bad-input', refusal.message, [{ path: 'cursor', message: refusal.field }])
  }
}

/** A moment as PostgreSQL writes it: a Date would lose its microseconds and repeat rows. */
export const TIMESTAMP_TEXT = /^\d{4}-\d\d-\d\d \d\d:\d\d:\d\d(\.\d{1,6})?[+-]\d\d(:\d\d)?$/
