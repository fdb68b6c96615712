import type { z } from 'zod'
import { plainErrors } from '../../../shared/schemas/plainErrors'
import { DomainError, type FieldIssue } from './errors'

/** What a schema makes of an input. @throws DomainError bad-input with one issue a field */
export function parseInput<T>(schema: z.ZodType<T>, input: unknown): T {
  const result = schema.safeParse(input, { error: plainErrors })
  if (result.success) return result.data
  const issues: FieldIssue[] = result.error.issues.map(issue => ({ path: issue.path.join('.'), message: issue.message }))
  const first = issues[0]!
  throw new DomainError('bad-input', issues.length === 1 ? first.message : `${first.message} (${issues.length} entries need attention.)`, issues)
}
