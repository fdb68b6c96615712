import { columnVisibilityFeature, createColumnHelper, rowSortingFeature, tableFeatures } from '@tanstack/vue-table'
import type { ReadingRowView } from '#shared/schemas/reading'

/** The server sorts and pages; the table keeps which columns show and what they are sorted by. */
export const historyFeatures = tableFeatures({ columnVisibilityFeature, rowSortingFeature })

const helper = createColumnHelper<typeof historyFeatures, ReadingRowView>()
const sortable = { enableSorting: true }
const plain = { enableSorting: false }

/** Ids of sortable columns are the API's names of sorts. */
export const historyColumns = helper.columns([
  helper.accessor('instrumentCode', { id: 'instrument', header: 'Instrument', enableHiding: false, sortDescFirst: false, ...sortable }),
  helper.accessor('ownerName', { id: 'owner', header: 'Owner', sortDescFirst: false, ...sortable }),
  helper.accessor('construction', { id: 'construction', header: 'Construction', ...plain }),
  helper.accessor('side', { id: 'side', header: 'Head', ...plain }),
  helper.accessor('strike', { id: 'strike', header: 'Taps', ...plain }),
  helper.accessor(row => row.tension.nPerM, { id: 'tension', header: 'Tension, N/m', sortDescFirst: true, ...sortable }),
  helper.accessor('fundamentalHz', { id: 'fundamental', header: 'Pitch, Hz', sortDescFirst: true, ...sortable }),
  helper.accessor('fundamentalHz', { id: 'note', header: 'Note', ...plain }),
  helper.accessor('evennessPercent', { id: 'evenness', header: 'Unevenness, %', sortDescFirst: true, ...sortable }),
  helper.accessor('temperatureC', { id: 'temperature', header: 'Air, \u00B0C', ...plain }),
  helper.accessor('takenAt', { id: 'takenAt', header: 'Read on', sortDescFirst: true, ...sortable }),
  helper.accessor('makerName', { id: 'maker', header: 'By', ...plain }),
  helper.accessor('doubtful', { id: 'doubtful', header: 'Doubtful', ...plain }),
])

export const historyColumnNames = ['instrument', 'owner', 'construction', 'side', 'strike', 'tension', 'fundamental', 'note', 'evenness', 'temperature', 'takenAt', 'maker', 'doubtful'] as const
export type HistoryColumn = typeof historyColumnNames[number]

/** Set right, so that places line up. */
export const figureColumns: ReadonlySet<string> = new Set<HistoryColumn>(['tension', 'fundamental', 'evenness', 'temperature'])

/** What a first visit does not need; on choice. */
export const HIDDEN_AT_FIRST: HistoryColumn[] = ['construction', 'strike', 'temperature']
