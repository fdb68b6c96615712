import { Readable } from 'node:stream'
import { stringify } from 'csv-stringify'
import { nearestNote } from '../../../shared/acoustics/notes'
import type { ReadingRowView, ReadingsQuery } from '../../../shared/schemas/reading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { readFilters } from './filters'
import { type HistoryRow, selectHistoryRows } from './rows'
import { readSort } from './sorts'

/** Rows fetched at a time: memory holds two batches at most, however long the file. */
const BATCH = 1_000

const columns: Record<string, (row: ReadingRowView) => string | number | null> = {
  taken_at: row => row.takenAt,
  instrument_code: row => row.instrumentCode,
  instrument: row => row.instrumentName,
  construction: row => row.construction,
  owner: row => row.ownerName,
  side: row => row.side,
  strike: row => row.strike,
  tension_n_per_m: row => round(row.tension.nPerM, 2),
  u95_n_per_m: row => round(row.tension.u95NPerM, 2),
  fundamental_hz: row => round(row.fundamentalHz, 3),
  note: row => nearestNote(row.fundamentalHz).name,
  cents: row => round(nearestNote(row.fundamentalHz).cents, 1),
  evenness_percent: row => row.evennessPercent === null ? null : round(row.evennessPercent, 2),
  temperature_c: row => row.temperatureC,
  confidence: row => round(row.confidence, 3),
  doubtful: row => row.doubtful ? 'yes' : 'no',
  maker: row => row.makerName,
  reading_id: row => row.id,
}

const round = (value: number, decimals: number) => Number(value.toFixed(decimals))

/**
 * Everything that the filters leave, in the order of the table, as CSV (RFC 4180, UTF-8, a header line). Texts that a
 * spreadsheet would run as a formula get an apostrophe in front (OWASP, CSV injection); numbers stay numbers.
 */
export async function exportHistory(db: Kysely<DB>, query: ReadingsQuery, user: Pick<SignedInUser, 'id' | 'role'>): Promise<Readable> {
  const sort = readSort(query)
  const filters = readFilters(query, user)
  const batch = (after?: string[]) => selectHistoryRows(db, filters, { sort, backwards: false, limit: BATCH, after })
  // Before the first byte leaves, so that a failure is still an answer with a status.
  const first = await batch()

  async function* records() {
    for (let rows: HistoryRow[] = first; rows.length; rows = rows.length < BATCH ? [] : await batch(rows.at(-1)!.key)) {
      for (const { view } of rows) yield Object.values(columns).map(value => value(view))
    }
  }
  const csv = stringify({
    header: true, columns: Object.keys(columns), record_delimiter: 'windows',
    cast: { string: (value, context) => context.header ? value : { value, escape_formulas: true } },
  })
  const source = Readable.from(records())
  source.on('error', error => csv.destroy(error))
  csv.on('close', () => source.destroy())
  return source.pipe(csv)
}
