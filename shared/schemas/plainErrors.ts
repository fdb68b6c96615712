import type { z } from 'zod'

const KINDS: Record<string, string> = { string: 'a text', number: 'a number', int: 'a whole number', boolean: 'true or false', object: 'an object', array: 'a list' }

/** Words for what a schema leaves to the library, whose own speak of inputs and types. Undefined leaves its message as it is. */
export const plainErrors: z.core.$ZodErrorMap = (issue) => {
  if (issue.code === 'invalid_type') return issue.input === undefined ? 'This is missing.' : `This must be ${KINDS[issue.expected] ?? issue.expected}.`
  if (issue.code === 'invalid_value') return `Choose one of: ${issue.values.map(String).join(', ')}.`
  if (issue.code === 'too_big') return `This is at most ${issue.maximum}${issue.origin === 'string' ? ' characters' : ''}.`
  if (issue.code === 'too_small') return `This is at least ${issue.minimum}${issue.origin === 'string' ? ' characters' : ''}.`
  if (issue.code === 'unrecognized_keys') return `This has entries that do not belong here: ${issue.keys.join(', ')}.`
  if (issue.code === 'invalid_union') return 'This does not have one of the forms that it may have.'
  return undefined
}
