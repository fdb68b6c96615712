import type { ReadingView } from '#shared/schemas/reading'

export type { ReadingView, SoundView } from '#shared/schemas/reading'
/** Parts of a reading that figures and tables take. */
export type ModeView = ReadingView['modes'][number]
export type PeakView = ReadingView['unexplained'][number]
export type WarningView = ReadingView['warnings'][number]
export type BudgetLineView = ReadingView['budget'][number]
