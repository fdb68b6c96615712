import { z } from 'zod'
import { idSchema } from './common'
import type { BothHeadsReading } from '../types/reading'

/** A reading of a tap on each head of one double-headed drum. */
export const bothHeadsBody = z.object({ batterReadingId: idSchema, resonantReadingId: idSchema })
export type BothHeadsBody = z.infer<typeof bothHeadsBody>

/** One of the two taps that a reading of both heads rests on; `readingId` is its newest reading alone. */
export interface BothHeadsTap { recordingId: string, readingId: string, takenAt: string, strike: 'centre' | 'edge' | 'round', tension: { nPerM: number, u95NPerM: number } }

/** Both heads of a drum, read together. */
export interface BothHeadsView extends BothHeadsReading {
  id: string
  instrument: { id: string, code: string, name: string }
  readAt: string
  byName: string | null
  taps: { batter: BothHeadsTap, resonant: BothHeadsTap }
  /** The present analysis would read it otherwise. */
  outdated: boolean
}

/** A line of the list on the instrument's page. */
export interface BothHeadsLine { id: string, readAt: string, batter: { nPerM: number, u95NPerM: number }, resonant: { nPerM: number, u95NPerM: number }, doubtful: boolean }
