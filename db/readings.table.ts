import type { ColumnType, Generated, Insertable, Selectable } from 'kysely'

type CreatedAt = ColumnType<Date, Date | undefined, never>
type Json<T> = ColumnType<T, string, string>
type Maybe<T> = ColumnType<T | null, T | null | undefined, T | null>

export interface RecordingsTable {
  id: Generated<string>
  head_id: string
  instrument_id: string
  uploaded_by: string | null
  strike: 'centre' | 'edge' | 'round'
  rod: number | null
  first_rod: number
  centre_damped: boolean
  temperature_c: number
  note: string | null
  /** Path below DATA_DIR/recordings; made from the id, never from the client's name. */
  file_path: string
  byte_count: number
  sha256: string
  duration_s: number
  sample_rate_hz: number
  channels: number
  /** Only the maker hears it. */
  private_to_maker: Generated<boolean>
  refusal_code: string | null
  refusal_message: string | null
  /** SoundFacts of server/utils/analysis/types.ts. */
  sound: Json<unknown>
  recorded_at: Date
  /** Of the last analysis; null: from before versions were kept. */
  analysis_version: Maybe<string>
  /** When the figures of the last analysis were taken. */
  analysed_at: Generated<Date>
  /** RereadRefusal of shared/schemas/reading.ts: what a later version said of a recording that an earlier one had read. */
  reread_refusal: ColumnType<unknown, string | null | undefined, string | null>
  created_at: CreatedAt
}
export type RecordingRow = Selectable<RecordingsTable>
export type NewRecording = Insertable<RecordingsTable>

export interface ReadingsTable {
  id: Generated<string>
  recording_id: string
  head_id: string
  instrument_id: string
  taken_at: Date
  taken_by: string | null
  strike: 'centre' | 'edge' | 'round'
  temperature_c: number
  tension_n_per_m: number
  u95_n_per_m: number
  repeatability_u95_n_per_m: number
  fundamental_hz: number
  evenness_percent: number | null
  confidence: number
  doubtful: boolean
  /** AnalysedReading of server/utils/analysis/types.ts, whole. */
  detail: Json<unknown>
  analysis_version: string
  /** Null for the newest reading of its recording. */
  superseded_at: Maybe<Date>
  calibration_id: Maybe<string>
  created_at: CreatedAt
}
export type ReadingRow = Selectable<ReadingsTable>
export type NewReading = Insertable<ReadingsTable>

export interface TurnSheetsTable {
  id: Generated<string>
  head_id: string
  instrument_id: string
  reading_id: string
  target: Json<unknown>
  /** [{ rod, turns }], the order, what is predicted, film stress, cautions. */
  sheet: Json<unknown>
  /** [{ rod, turns }] as really turned. */
  applied: Json<unknown> | null
  applied_at: Date | null
  applied_by: string | null
  /** The reading that closed the loop. */
  next_reading_id: string | null
  created_by: string | null
  created_at: CreatedAt
}
export type TurnSheetRow = Selectable<TurnSheetsTable>
