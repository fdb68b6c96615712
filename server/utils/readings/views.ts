import type { ReadingView, RecordingView } from '../../../shared/schemas/reading'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import type { HeadRow, InstrumentRow } from '../../../db/instruments.table'
import type { SignedInUser } from '../../../shared/types/roles'
import { filmStress } from '../../../shared/acoustics/film'
import type { AnalysedReading, RefusalCode, SoundFacts } from '../analysis/types'
import { toAnalysedHead } from './headContext'

export function toRecordingView(row: RecordingRow): RecordingView {
  return {
    id: row.id,
    headId: row.head_id,
    instrumentId: row.instrument_id,
    strike: row.strike,
    rod: row.rod,
    firstRod: row.first_rod,
    centreDamped: row.centre_damped,
    temperatureC: row.temperature_c,
    note: row.note,
    privateToMaker: row.private_to_maker,
    recordedAt: row.recorded_at.toISOString(),
    byteCount: row.byte_count,
    sound: row.sound as SoundFacts,
    refusal: row.refusal_code === null ? null : { code: row.refusal_code as RefusalCode, message: row.refusal_message ?? '' },
  }
}

/** Staff hear nothing that is marked private to the maker; for customers the WHERE clause has already decided. */
export const mayHear = (user: Pick<SignedInUser, 'role'>, recording: Pick<RecordingRow, 'private_to_maker'>) => user.role !== 'staff' || !recording.private_to_maker

export interface ReadingRecord { reading: ReadingRow, recording: RecordingRow, head: HeadRow, instrument: InstrumentRow, makerName: string | null }

export function toReadingView({ reading, recording, head, instrument, makerName }: ReadingRecord, user: Pick<SignedInUser, 'role'>): ReadingView {
  const { analysisVersion, tension, fundamentalHz, confidence, doubtful, modes, taps, rim, warnings, unexplained, budget, runnerUp } = reading.detail as AnalysedReading
  const stress = filmStress(toAnalysedHead(head), tension.nPerM)
  return {
    id: reading.id,
    headId: reading.head_id,
    instrumentId: reading.instrument_id,
    takenAt: reading.taken_at.toISOString(),
    strike: reading.strike,
    tension, fundamentalHz, confidence, doubtful, modes, taps, rim, warnings, unexplained, budget, runnerUp, analysisVersion,
    filmStress: reading.taken_at < head.film_since ? null : { mPa: stress.stressPa / 1e6, shareOfYield: stress.shareOfYield },
    makerName,
    sound: recording.sound as SoundFacts,
    recording: {
      id: recording.id, note: recording.note, strike: recording.strike, rod: recording.rod, firstRod: recording.first_rod,
      centreDamped: recording.centre_damped, temperatureC: recording.temperature_c, audible: mayHear(user, recording),
    },
    head: { id: head.id, side: head.side, filmId: head.film_id, coating: head.coating },
    instrument: {
      id: instrument.id, code: instrument.code, name: instrument.name, construction: instrument.construction,
      diameterMm: instrument.diameter_mm, rodCount: instrument.rod_count,
    },
  }
}
