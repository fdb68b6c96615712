import type { ReadingView } from '#shared/schemas/reading'

export type { ReadingView } from '#shared/schemas/reading'
export type { SoundFacts } from '#shared/types/reading'
/** Parts of a reading that figures and tables take. */
export type ModeView = ReadingView['modes'][number]
export type PeakView = ReadingView['unexplained'][number]
export type WarningView = ReadingView['warnings'][number]
export type BudgetLineView = ReadingView['budget'][number]

/** The pitch a head goes by: a kettle's principal tone (1,1), every other head's (0,1). Not heard: predicted from the fit. */
export function pitchOf(reading: Pick<ReadingView, 'modes' | 'fundamentalHz' | 'tension' | 'instrument'>): { hz: number, u95Hz: number, heard: boolean, principal: boolean } {
  const own = (m: number) => reading.modes.find(mode => mode.m === m && mode.n === 1 && !mode.head)
  const principal = reading.instrument.construction === 'kettle' ? own(1) : undefined
  const heard = principal ?? own(0)
  if (heard) return { hz: principal ? heard.measuredHz : reading.fundamentalHz, u95Hz: heard.u95Hz, heard: true, principal: principal !== undefined }
  // Pitch goes with the root of tension, so it carries half its relative uncertainty.
  return { hz: reading.fundamentalHz, u95Hz: reading.fundamentalHz * reading.tension.u95NPerM / (2 * reading.tension.nPerM), heard: false, principal: false }
}
