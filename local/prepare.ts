import { join } from 'node:path'
import pg from 'pg'
import { migrateToLatest } from '../db/migrate'
import { startChild, type Child } from './children'
import { lastLines } from './files'

/** Row of the table `settings` that says that the demo has been loaded whole. */
export const DEMO_KEY = 'demo-loaded'

/** Migrates, and loads the demo when it is wanted and not there. */
export async function prepareDatabase(options: { root: string, databaseUrl: string, demo: boolean, env: NodeJS.ProcessEnv, child: (child: Child) => Child }): Promise<void> {
  try {
    await migrateToLatest(options.databaseUrl)
  } catch (error) {
    throw new Error(`The database could not be brought up to date: ${error instanceof Error ? error.message : String(error)}`)
  }
  if (!options.demo || await hasDemo(options.databaseUrl)) return
  console.log('Loading the demo (under a minute)')
  const logFile = join(options.env.DATA_DIR!, 'logs', 'seed.log')
  const seed = options.child(startChild({
    name: 'seed', cwd: options.root, args: [join(options.root, 'local/withParent.mjs'), join(options.root, 'scripts/seed.ts')], env: options.env, logFile,
  }))
  const how = await seed.ended
  if (how !== 'code 0') throw new Error(`Loading the demo failed (${how}). Its log, ${logFile}, ends:\n${lastLines(logFile)}`)
}

async function hasDemo(databaseUrl: string): Promise<boolean> {
  const client = new pg.Client({ connectionString: databaseUrl })
  await client.connect()
  try {
    const { rowCount } = await client.query('select 1 from settings where key = $1', [DEMO_KEY])
    return rowCount === 1
  } finally {
    await client.end()
  }
}
