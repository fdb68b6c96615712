import { z } from 'zod'

/** The version to read with, as the page showed it: after an update of the server the counts may be others. */
export const rereadingBody = z.object({ version: z.string('Say which version of the analysis is to read them.').max(20, 'A version has at most 20 characters.') })
export type RereadingBody = z.infer<typeof rereadingBody>

/** One reading-again of all old recordings. */
export interface RereadingRunView {
  id: string
  version: string
  state: 'running' | 'finished' | 'cancelled'
  total: number
  read: number
  /** Heard, and refused by the present version; an earlier reading stays. */
  refused: number
  /** The sound or the film's figures are gone. */
  failed: number
  startedAt: string
  endedAt: string | null
  byName: string | null
}

export interface RereadingView {
  /** The analysis that runs now. */
  version: string
  /** Recordings that would be read otherwise now: by another version, or with figures that were changed since. */
  old: { byVersion: number, byFigures: number, filmUnknown: number }
  run: RereadingRunView | null
}
