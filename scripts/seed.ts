import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath, pathToFileURL } from 'node:url'
import { sql } from 'kysely'
import { bundleNodeWorker } from '../build/node-worker-plugin'
import { openDatabase } from '../db/database'
import { DEMO_LOADED, DEMO_STARTED, seedBench, seedPeople, setSetting } from '../db/seed'
import { seedOrders } from '../db/seed/orders'
import { demoPeople } from '../db/seed/people'
import { createAnalysisPool } from '../server/utils/analysis/pool'
import { recordingFolders } from '../server/utils/readings/files'
import { ensurePriceList } from '../server/utils/prices/priceLists'
import { stopJobs } from '../server/utils/core/jobs'
import { closeDb } from '../server/utils/core/db'

/*
 * Loads the invented workshop into an empty database, once. A load that was broken off is wiped and begun anew, but only
 * while nobody but the demo's own people has an account: nothing of anybody's can then be in it.
 */
const { DATABASE_URL, DATA_DIR, STRIPE_API_BASE } = process.env
if (!DATABASE_URL || !DATA_DIR) {
  console.error('DATABASE_URL and DATA_DIR are not set: start with ./docker-free-start.sh, which loads the demo by itself.')
  process.exit(1)
}

// Simulating taps keeps this thread busy for seconds: a connection may take that long to be noticed.
const db = openDatabase(DATABASE_URL, 4, 60_000)
const started = Date.now()
try {
  await seed()
} finally {
  await stopJobs()
  await closeDb()
  await db.destroy()
}

async function seed(): Promise<void> {
  const marks = (await db.selectFrom('settings').select('key').where('key', 'in', [DEMO_STARTED, DEMO_LOADED]).execute()).map(row => row.key)
  if (marks.includes(DEMO_LOADED)) return console.log('The demo is there already.')
  const strangers = await db.selectFrom('users').select('id').where('email', 'not in', demoPeople.map(person => person.email)).executeTakeFirst()
  if (strangers || (!marks.includes(DEMO_STARTED) && await db.selectFrom('users').select('id').executeTakeFirst())) {
    console.log('This database has people of its own: no demo is loaded into it.')
    return setSetting(db, DEMO_LOADED, { skipped: true })
  }
  if (marks.includes(DEMO_STARTED)) await wipe()
  await setSetting(db, DEMO_STARTED, true)
  const now = new Date()
  const people = await seedPeople(db)
  const workerFolder = await mkdtemp(join(tmpdir(), 'rimwright-seed-'))
  const workerFile = join(workerFolder, 'analysis.mjs')
  await writeFile(workerFile, (await bundleNodeWorker(fileURLToPath(new URL('../server/workers/analysis.ts', import.meta.url)))).source)
  const pool = createAnalysisPool(pathToFileURL(workerFile))
  try {
    const counts = await seedBench({ db, folders: recordingFolders(DATA_DIR!), pool, makers: [people.get('maker')!, people.get('maker2')!], now }, people)
    console.log(`${counts.instruments} instruments, ${counts.readings} readings.`)
  } finally {
    await pool.close()
    await rm(workerFolder, { recursive: true, force: true })
  }
  await ensurePriceList(db)
  // A demo must never charge anybody: orders are made only against a payment stand-in on this machine.
  if (STRIPE_API_BASE?.startsWith('http://127.0.0.1:')) await seedOrders(db, people, STRIPE_API_BASE, now)
  else console.log('No local payment stand-in: the demo has no orders.')
  await setSetting(db, DEMO_LOADED, { at: now.toISOString() })
  console.log(`The demo stands after ${Math.round((Date.now() - started) / 1000)} s.`)
}

async function wipe(): Promise<void> {
  await sql`truncate users, instruments, orders, head_specs, price_lists, films, settings, audit_events, webhook_events restart identity cascade`.execute(db)
}
