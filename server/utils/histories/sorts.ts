import { type RawBuilder, sql } from 'kysely'
import type { readingSorts, ReadingsQuery } from '../../../shared/schemas/reading'

type SortField = typeof readingSorts[number]

/** A column of the sort key, never null, with the type that its text from a cursor is cast to and the texts that it takes. */
interface KeyPart {
  expression: RawBuilder<unknown>
  type: 'timestamptz' | 'float8' | 'text' | 'uuid'
}

export interface ReadingSort {
  descending: boolean
  /** The last part is the reading's id, so no two rows share a key. */
  key: KeyPart[]
  /** How many parts at the front come from an index on instruments; comparing those alone lets PostgreSQL start there. */
  instrumentParts: number
}

const takenAt: KeyPart = { expression: sql`r.taken_at`, type: 'timestamptz' }
const id: KeyPart = { expression: sql`r.id`, type: 'uuid' }
const number = (expression: RawBuilder<unknown>): KeyPart => ({ expression, type: 'float8' })

/** Reads `-takenAt` and the like. Each key is an index of its own (or of instruments), walked forwards or backwards. */
export function readSort({ sort: text, instrumentId, headId }: Pick<ReadingsQuery, 'sort' | 'instrumentId' | 'headId'>): ReadingSort {
  const descending = text.startsWith('-')
  const keys: Record<SortField, [key: KeyPart[], instrumentParts: number]> = {
    takenAt: [[takenAt, id], 0],
    tension: [[number(sql`r.tension_n_per_m`), id], 0],
    fundamental: [[number(sql`r.fundamental_hz`), id], 0],
    // Readings without a round have no evenness; they come last in both directions.
    evenness: [[number(descending ? sql`coalesce(r.evenness_percent, '-infinity')` : sql`coalesce(r.evenness_percent, 'infinity')`), id], 0],
    instrument: [[{ expression: sql`i.code`, type: 'text' }, takenAt, id], 1],
    owner: [[{ expression: sql`i.owner_name`, type: 'text' }, { expression: sql`i.code`, type: 'text' }, takenAt, id], 2],
  }
  const field = text.replace('-', '') as SortField
  // Within one instrument its number and owner order nothing, and the index by date serves as it is.
  const [key, instrumentParts] = keys[(instrumentId || headId) && (field === 'instrument' || field === 'owner') ? 'takenAt' : field]
  return { descending, key, instrumentParts }
}
