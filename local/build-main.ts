import { dirname } from 'node:path'
import { fileURLToPath } from 'node:url'
import { ensureBuilt } from './build'

/** Builds the app unless .output is up to date: node --import tsx local/build-main.ts */
await ensureBuilt(dirname(dirname(fileURLToPath(import.meta.url)))).catch((error: Error) => {
  console.error(error.message)
  process.exitCode = 1
})
