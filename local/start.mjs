// First step of the start command, with nothing but Node's own modules: brings what the rest needs, then hands over to
// the supervisor in TypeScript.
import { ensureNodeModules, ensurePackages, requireNode, root, stopOnSignal } from '../scripts/start-lib.mjs'

const release = stopOnSignal()
try {
  requireNode()
  await ensurePackages(process.env.DATABASE_URL ? [] : ['postgresql'])
  await ensureNodeModules()
} catch (error) {
  console.error(error instanceof Error ? error.message : error)
  process.exit(1)
}
release()

const { register } = await import('tsx/esm/api')
register()
const { supervise } = await import('./supervisor.ts')
await supervise({ root })
