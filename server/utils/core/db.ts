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

export type { DB, Kysely, Transaction }
