import { z } from 'zod'
import { idSchema } from './common'

/** 20 Hz to 2 kHz: below and above the (0,1) of anything with rods. */
const pitchHz = z.number('Pitch is a number in Hz.').min(20, 'Pitch is at least 20 Hz.').max(2000, 'Pitch is at most 2000 Hz.')
/** 50 N/m hangs loose; 20 kN/m is past any film's yield. */
const tensionNPerM = z.number('Tension is a number in N/m.').min(50, 'Tension is at least 50 N/m.').max(20_000, 'Tension is at most 20 000 N/m.')

export const turnTargetSchema = z.discriminatedUnion('kind', [
  /** `of`: the head's (0,1), which is meant where it is left out, or for a kettle its principal tone (1,1), which is what a player tunes by. */
  z.object({ kind: z.literal('pitch'), hz: pitchHz, of: z.enum(['fundamental', 'principal']).optional() }),
  z.object({ kind: z.literal('tension'), nPerM: tensionNPerM }),
  z.object({ kind: z.literal('reading'), readingId: idSchema }),
  z.object({ kind: z.literal('even') }),
], 'Choose a target: a pitch, a tension, an earlier reading, or even.')
export type TurnTarget = z.infer<typeof turnTargetSchema>

export const headTargetSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('pitch'), hz: pitchHz }),
  z.object({ kind: z.literal('tension'), nPerM: tensionNPerM }),
], 'Choose a target: a pitch in Hz or a tension in N/m.')
export type HeadTarget = z.infer<typeof headTargetSchema>

export const turnSheetBody = z.object({ readingId: idSchema, target: turnTargetSchema })
export type TurnSheetBody = z.infer<typeof turnSheetBody>

const rodTurns = z.object({
  rod: z.number().int('A rod is a whole number.').min(1, 'Rods count from 1.').max(24),
  /** Four turns in one pass: beyond any advice; such an entry is a slip of the finger. */
  turns: z.number('Turns is a number.').min(-4, 'At most 4 turns back.').max(4, 'At most 4 turns on.'),
})
export const appliedBody = z.object({
  rods: z.array(rodTurns).min(1, 'Say what was turned.').max(24)
    .refine(rods => new Set(rods.map(rod => rod.rod)).size === rods.length, 'Each rod stands once.'),
})
export type AppliedBody = z.infer<typeof appliedBody>
export type RodTurns = z.infer<typeof rodTurns>

/** A turn sheet as the API gives it. */
export interface TurnSheetView {
  id: string
  readingId: string
  headId: string
  instrumentId: string
  createdAt: string
  target: TurnTarget
  rods: RodTurns[]
  /** Rod numbers in the order in which to turn them. */
  order: number[]
  /** After this pass; principalHz only for a kettle. */
  predicted: { tensionNPerM: number, fundamentalHz: number, evennessPercent: number | null, principalHz: number | null }
  /** Where all passes together lead. */
  goal: { tensionNPerM: number, fundamentalHz: number }
  filmStress: { mPa: number, shareOfYield: number }
  cautions: { code: string, message: string }[]
  /** A further pass will be needed after this one. */
  remainingPasses: number
  applied: RodTurns[] | null
  appliedAt: string | null
  nextReadingId: string | null
}
