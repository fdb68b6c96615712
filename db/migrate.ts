import { Migrator, sql } from 'kysely'
import { openDatabase } from './database'
import { migrations } from './migrations'
import { ensureFilms } from './seed/films'

/**
 * Brings a database to the newest schema, with the film catalogue in it. Forward only.
 * @throws the migrator's own error (which it returns and does not throw)
 */
export async function migrateToLatest(databaseUrl: string): Promise<string[]> {
  const db = openDatabase(databaseUrl, 1)
  try {
    // A running app holds short locks only; rather fail and say so than queue behind one and block every query after us.
    await sql`set lock_timeout = '10s'`.execute(db)
    const migrator = new Migrator({ db, provider: { getMigrations: async () => migrations } })
    const { error, results } = await migrator.migrateToLatest()
    if (error) throw error
    await ensureFilms(db)
    return (results ?? []).map(result => result.migrationName)
  } finally {
    await db.destroy()
  }
}
