import type { ColumnType, Generated, Selectable } from 'kysely'

type CreatedAt = ColumnType<Date, Date | undefined, never>
type Json<T> = ColumnType<T, string, string>
/** Starts out null. */
type Later<T> = ColumnType<T | null, T | null | undefined, T | null>

/** Figures of a film that is no longer on its head. */
export interface EarlierFilmsTable {
  id: Generated<string>
  head_id: string
  mounted_at: Date
  removed_at: Date
  /** The film columns of the head's row as they stood. */
  figures: Json<Record<string, unknown>>
}

export interface CalibrationsTable {
  id: Generated<string>
  head_id: string
  /** From a tension that the maker knows, or from a reference reading. */
  kind: 'known' | 'reading'
  known_n_per_m: number
  known_u95_n_per_m: number
  /** The reading of this head that was compared with the known tension. */
  source_reading_id: string
  reference_reading_id: string | null
  /** HeadCalibration of shared/types/reading.ts. */
  found: Json<unknown>
  note: string | null
  created_by: string | null
  created_at: CreatedAt
  removed_by: Later<string>
  removed_at: Later<Date>
  removed_because: Later<string>
}
export type CalibrationRow = Selectable<CalibrationsTable>

/** One reading-again of all old recordings, in the background. */
export interface RereadingRunsTable {
  id: Generated<string>
  version: string
  total: number
  read: Generated<number>
  refused: Generated<number>
  failed: Generated<number>
  at_recorded: Later<Date>
  at_id: Later<string>
  started_by: string | null
  started_at: CreatedAt
  cancelled_by: Later<string>
  cancelled_at: Later<Date>
  finished_at: Later<Date>
}
export type RereadingRunRow = Selectable<RereadingRunsTable>

/** Both heads of a drum, read from one tap on each. */
export interface JointReadingsTable {
  id: Generated<string>
  instrument_id: string
  batter_recording_id: string
  resonant_recording_id: string
  /** BothHeadsReading of shared/types/reading.ts. */
  detail: Json<unknown>
  analysis_version: string
  created_by: string | null
  created_at: CreatedAt
}
export type JointReadingRow = Selectable<JointReadingsTable>
