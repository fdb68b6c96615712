import type { Kysely, Transaction } from 'kysely'
import { type DB, openDatabase } from '../../../db/database'
import { getConfig } from './config'

let database: Kysely<DB> | undefined

export function useDb(): Kysely<DB> {
  return database ??= openDatabase(getConfig().databaseUrl)
}

export async function closeDb(): Promise<void> {
  const open = database
  database = undefined
  await open?.destroy()
}

/** A row that an index allows only once was there already. Source: PostgreSQL, appendix A, class 23. */
export const isUniqueViolation = (error: unknown): boolean => error instanceof Error && 'code' in error && error.code === '23505'

export type { DB, Kysely, Transaction }
