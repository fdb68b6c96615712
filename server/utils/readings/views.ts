import type { ReadingVersionView, ReadingView, RecordingView, RereadRefusal } from '../../../shared/schemas/reading'
import type { ReadingRow, RecordingRow } from '../../../db/readings.table'
import type { HeadRow, InstrumentRow } from '../../../db/instruments.table'
import type { CalibrationRow } from '../../../db/rereading.table'
import type { SignedInUser } from '../../../shared/types/roles'
import { filmStress } from '../../../shared/acoustics/film'
import type { AnalysedReading, RefusalCode, SoundFacts } from '../../../shared/types/reading'
import { ANALYSIS_VERSION } from '../analysis/version'
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

export interface ReadingRecord {
  reading: ReadingRow
  recording: RecordingRow
  head: HeadRow
  instrument: InstrumentRow
  makerName: string | null
  /** The other readings of the recording, newest first. */
  others: ReadingRow[]
  calibration: CalibrationRow | null
  togetherId: string | null
}

export function toReadingView({ reading, recording, head, instrument, makerName, others, calibration, togetherId }: ReadingRecord, user: Pick<SignedInUser, 'role'>): ReadingView {
  const { analysisVersion, tension, fundamentalHz, confidence, doubtful, modes, taps, rim, warnings, unexplained, budget, runnerUp, twoHeads, glide } = reading.detail as AnalysedReading
  const stress = filmStress(toAnalysedHead(head), tension.nPerM)
  return {
    id: reading.id,
    headId: reading.head_id,
    instrumentId: reading.instrument_id,
    takenAt: reading.taken_at.toISOString(),
    strike: reading.strike,
    tension, fundamentalHz, confidence, doubtful, modes, taps, rim, warnings, unexplained, budget, runnerUp, twoHeads, glide, analysisVersion,
    filmStress: reading.taken_at < head.film_since ? null : { mPa: stress.stressPa / 1e6, shareOfYield: stress.shareOfYield },
    makerName,
    readAt: reading.created_at.toISOString(),
    newest: reading.superseded_at === null,
    versions: others.map(toVersionView),
    outdated: reading.superseded_at === null ? outdatedBy(recording, head) : null,
    rereadRefusal: reading.superseded_at === null ? recording.reread_refusal as RereadRefusal | null : null,
    calibration: calibration && { kind: calibration.kind, at: calibration.created_at.toISOString(), knownNPerM: calibration.known_n_per_m, knownU95NPerM: calibration.known_u95_n_per_m },
    togetherId,
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

function toVersionView(row: ReadingRow): ReadingVersionView {
  return {
    id: row.id, analysisVersion: row.analysis_version, readAt: row.created_at.toISOString(), tension: { nPerM: row.tension_n_per_m, u95NPerM: row.u95_n_per_m },
    fundamentalHz: row.fundamental_hz, doubtful: row.doubtful, newest: row.superseded_at === null,
  }
}

/** An earlier film's figures do not change any more, so only another version makes its readings old. */
export function outdatedBy(recording: Pick<RecordingRow, 'analysis_version' | 'analysed_at' | 'recorded_at'>, head: Pick<HeadRow, 'film_since' | 'figures_since'>): 'version' | 'figures' | null {
  if (recording.analysis_version !== ANALYSIS_VERSION) return 'version'
  return recording.recorded_at >= head.film_since && recording.analysed_at < head.figures_since ? 'figures' : null
}
