import type { DB, Kysely } from '../core/db'

/** People of the workshop who have taken readings, for the table's filter; those who left are still in the history. */
export async function listReadingMakers(db: Kysely<DB>): Promise<{ items: { id: string, name: string }[] }> {
  const items = await db.selectFrom('users').select(['id', 'name']).where('role', '!=', 'customer')
    .where(eb => eb.exists(eb.selectFrom('readings').select('readings.id').whereRef('readings.taken_by', '=', 'users.id')))
    .orderBy('name').orderBy('id').execute()
  return { items }
}
