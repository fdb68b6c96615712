import { z } from 'zod'
import { idSchema, noteSchema } from './common'
import type { HeadCalibration } from '../types/reading'

/** A head at a known tension: what the maker hung on it, or what another reading says of it. */
export const calibrationBody = z.discriminatedUnion('kind', [
  z.object({
    kind: z.literal('known'),
    readingId: idSchema,
    /** 20 N/m is slacker than any head that rings; 50 kN/m tears every film. */
    nPerM: z.number('The known tension is a number in N/m.').min(20, 'The known tension is at least 20 N/m.').max(50_000, 'The known tension is at most 50 000 N/m.'),
    u95NPerM: z.number('Say what the known tension may be off, in N/m.').positive('Say what the known tension may be off: nothing is known exactly.'),
    note: noteSchema.nullish(),
  }),
  z.object({ kind: z.literal('reading'), readingId: idSchema, referenceReadingId: idSchema, note: noteSchema.nullish() }),
], 'Say whether the tension is known by weight or from a reference reading.').superRefine((body, context) => {
  if (body.kind === 'known' && body.nPerM > 0 && body.u95NPerM > 0.2 * body.nPerM) context.addIssue({ code: 'custom', path: ['u95NPerM'], message: 'Known to a fifth or worse, this tension teaches nothing: a plain reading is better.' })
  if (body.kind === 'reading' && body.readingId === body.referenceReadingId) context.addIssue({ code: 'custom', path: ['referenceReadingId'], message: 'A reading cannot be the reference of itself.' })
})
export type CalibrationBody = z.infer<typeof calibrationBody>

/** The calibration of a head that holds now. */
export interface CalibrationView {
  id: string
  kind: 'known' | 'reading'
  knownNPerM: number
  knownU95NPerM: number
  sourceReadingId: string
  referenceReadingId: string | null
  found: HeadCalibration
  note: string | null
  createdAt: string
  byName: string | null
}
