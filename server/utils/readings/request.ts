import type { RecordingRow } from '../../../db/readings.table'
import type { AnalysisRequest, Strike } from '../analysis/types'
import { DomainError } from '../core/errors'
import { type HeadContext, toAnalysedInstrument } from './headContext'

/** How a recording was made, as far as the analysis asks. */
export interface HowStruck { strike: Strike, rod?: number, firstRod: number, centreDamped: boolean, temperatureC: number }

/** What the analysis is asked: the sound, the drum as it is known now, and how it was struck. */
export function toAnalysisRequest(context: HeadContext, wav: Uint8Array, { strike, rod, firstRod, centreDamped, temperatureC }: HowStruck): AnalysisRequest {
  return { wav, instrument: toAnalysedInstrument(context), side: context.head.side, strike, ...(rod !== undefined && { rod }), firstRod, centreDamped, temperatureC }
}

export const howStruck = (row: RecordingRow): HowStruck =>
  ({ strike: row.strike, ...(row.rod !== null && { rod: row.rod }), firstRod: row.first_rod, centreDamped: row.centre_damped, temperatureC: row.temperature_c })

export const tookTooLong = () => new DomainError('unreadable-recording', 'Reading this recording took too long. Cut it down to one tap with a second or two of ring, and send it again.')
