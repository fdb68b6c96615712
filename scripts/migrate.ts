import { migrateToLatest } from '../db/migrate'

const url = process.env.DATABASE_URL ?? process.env.NUXT_DATABASE_URL
if (!url) {
  console.error('DATABASE_URL is not set: start with ./docker-free-start.sh, or set it to the database to migrate.')
  process.exit(1)
}
const done = await migrateToLatest(url)
console.log(done.length ? `Migrated: ${done.join(', ')}` : 'The database is up to date.')
