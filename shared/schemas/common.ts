import { z } from 'zod'

export const idSchema = z.uuid('This is not an id that we gave out.')

export const emailSchema = z.string().trim().toLowerCase().max(254, 'An e-mail address has at most 254 characters (RFC 5321).')
  .pipe(z.email('Write the e-mail address in full, like name@example.org.'))

/** 10: long enough that guessing is slow (NIST SP 800-63B asks for 8); 200: argon2 must not be fed megabytes. */
export const passwordSchema = z.string().min(10, 'Use at least 10 characters.').max(200, 'Use at most 200 characters.')

/** 120 characters fit one line of a bench card. */
export const nameSchema = z.string().trim().min(1, 'Fill this in.').max(120, 'Use at most 120 characters.')

export const noteSchema = z.string().trim().max(2000, 'Use at most 2000 characters.')

/** A number that a form or a query string may hand over as text; empty text is not zero. */
export function numeric(message: string) {
  return z.union([z.number(), z.string().trim().regex(/^-?\d+(\.\d+)?$/, message).transform(Number)], message)
    .pipe(z.number(message).refine(Number.isFinite, message))
}

/** 200: one screenful many times over, still one quick query. */
export const limitSchema = numeric('limit is a whole number.').pipe(z.number().int('limit is a whole number.').min(1, 'limit starts at 1.').max(200, 'limit is at most 200.'))

export const roleSchema = z.enum(['owner', 'maker', 'staff', 'customer'])
export type Role = z.infer<typeof roleSchema>

export const idParams = z.object({ id: idSchema })
