import { Kysely, PostgresDialect } from 'kysely'
import pg from 'pg'
import type { AuditEventsTable, SessionsTable, SettingsTable, UsersTable, UserTokensTable } from './people.table'
import type { FilmsTable, HeadsTable, InstrumentsTable } from './instruments.table'
import type { CalibrationsTable, EarlierFilmsTable, JointReadingsTable, RereadingRunsTable } from './rereading.table'
import type { ReadingsTable, RecordingsTable, TurnSheetsTable } from './readings.table'
import type {
  HeadSpecsTable, OrderHeadsTable, OrderHistoryTable, OrdersTable, PaymentsTable, PriceListsTable, RefundsTable, WebhookEventsTable,
} from './orders.table'

export interface DB {
  users: UsersTable
  sessions: SessionsTable
  user_tokens: UserTokensTable
  audit_events: AuditEventsTable
  settings: SettingsTable
  films: FilmsTable
  instruments: InstrumentsTable
  heads: HeadsTable
  recordings: RecordingsTable
  readings: ReadingsTable
  turn_sheets: TurnSheetsTable
  earlier_films: EarlierFilmsTable
  calibrations: CalibrationsTable
  rereading_runs: RereadingRunsTable
  joint_readings: JointReadingsTable
  price_lists: PriceListsTable
  head_specs: HeadSpecsTable
  orders: OrdersTable
  order_heads: OrderHeadsTable
  order_history: OrderHistoryTable
  payments: PaymentsTable
  refunds: RefundsTable
  webhook_events: WebhookEventsTable
}

// numeric and bigint columns hold figures well inside the exact range of a double; pg would hand them over as strings.
pg.types.setTypeParser(pg.types.builtins.INT8, Number)
pg.types.setTypeParser(pg.types.builtins.NUMERIC, Number)

/** A pool and query builder on one database. The caller ends it with `destroy()`. */
export function openDatabase(connectionString: string, max = 10, connectTimeoutMs = 5_000): Kysely<DB> {
  const pool = new pg.Pool({ connectionString, max, connectionTimeoutMillis: connectTimeoutMs })
  // Without a listener an idle client's lost connection would end the process.
  pool.on('error', () => undefined)
  return new Kysely<DB>({ dialect: new PostgresDialect({ pool }) })
}
