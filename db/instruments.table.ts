import type { ColumnType, Generated, Insertable, Selectable, Updateable } from 'kysely'

type CreatedAt = ColumnType<Date, Date | undefined, never>
type Maybe<T> = ColumnType<T | null, T | null | undefined, T | null>

export interface FilmsTable {
  /** A short readable key, e.g. 'pet-250'. */
  id: string
  name: string
  material: 'pet' | 'skin' | 'woven' | 'other'
  plies: number
  /** One ply's thickness, um. */
  thickness_um: number
  density_kg_m3: number
  modulus_gpa: number
  poisson: number
  yield_mpa: number
  /** Whole head with its coating, kg/m2. */
  areal_density_kg_m2: number
  coating: string | null
  position: number
  active: Generated<boolean>
}
export type FilmRow = Selectable<FilmsTable>

export interface InstrumentsTable {
  id: Generated<string>
  /** Workshop number, e.g. TA-0147. */
  code: Generated<string>
  name: string
  construction: 'open' | 'frame' | 'double-headed' | 'kettle' | 'fixture'
  diameter_mm: number
  /** What the maker's measure of it may be off, 95 %; null: a tape's. */
  diameter_u95_mm: Maybe<number>
  depth_mm: number
  bowl_volume_l: number | null
  rod_count: number
  thread_pitch_mm: number
  hoop: string | null
  note: string | null
  customer_id: string | null
  /** The customer's name, kept by a trigger; empty for the workshop's own. Never written by hand. */
  owner_name: ColumnType<string, never, never>
  created_by: string | null
  created_at: CreatedAt
  updated_at: Generated<Date>
}
export type InstrumentRow = Selectable<InstrumentsTable>
export type NewInstrument = Insertable<InstrumentsTable>
export type InstrumentPatch = Updateable<InstrumentsTable>

export interface HeadsTable {
  id: Generated<string>
  instrument_id: string
  side: 'batter' | 'resonant'
  film_id: string | null
  material: 'pet' | 'skin' | 'woven' | 'other'
  plies: number
  thickness_um: number
  density_kg_m3: number
  modulus_gpa: number
  poisson: number
  yield_mpa: number
  areal_density_kg_m2: number
  /** What it may be off, 95 %; null: a data sheet's. */
  areal_density_u95_kg_m2: Maybe<number>
  /** FilmWeighingInput of shared/schemas/weighing.ts, when the density was weighed. */
  weighing: ColumnType<unknown, string | null | undefined, string | null>
  coating: string | null
  /** Learned share of the ideal tension rise per turn, with its variance and how many passes taught it. */
  kappa: number | null
  kappa_variance: number | null
  kappa_passes: Generated<number>
  /** When this film was mounted; readings before it say nothing of how its rods pull. */
  film_since: Generated<Date>
  /** When a figure that readings rest on was last changed: film, size, weighing, calibration. */
  figures_since: Generated<Date>
  created_at: CreatedAt
}
export type HeadRow = Selectable<HeadsTable>
export type NewHead = Insertable<HeadsTable>
