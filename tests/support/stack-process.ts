/*
 * One whole Rimwright for tests, in a process of its own: a fast database, then the start command as anyone runs it, in
 * a new folder on ports that the system chooses. Ends with the process that started it, however that ends.
 * By hand: npx tsx tests/support/stack-process.ts [--demo]
 */
import { spawn } from 'node:child_process'
import { chmod, mkdtemp, readFile, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { startCluster } from '../../local/cluster'
import { cleanEnv, root } from '../../scripts/start-lib.mjs'
import type { StackInfo } from './stack-client'

const READY = /Rimwright is ready at (\S+)/
// Loading the demo takes a minute on an idle machine and many on a busy one.
const START_LIMIT_MS = 15 * 60_000

const demo = process.argv.includes('--demo')
const dataDir = await mkdtemp(join(tmpdir(), 'rimwright-test-'))
// The postgres user must pass through to its own folder.
await chmod(dataDir, 0o711)
const cluster = await startCluster({ home: join(dataDir, 'postgres'), superuserPassword: 'tests-only', password: 'tests-only', durable: false })
const app = spawn(process.execPath, [join(root, 'local/start.mjs')], {
  cwd: root,
  env: { ...cleanEnv(), DATABASE_URL: cluster.url, DATA_DIR: dataDir, PORT: '0', DEMO: demo ? '1' : '0' },
  stdio: ['ignore', 'pipe', 'pipe'],
  detached: true,
})
const ended = new Promise<void>(resolve => app.once('exit', () => resolve()))

let stopping: Promise<void> | undefined
const stop = (code: number) => stopping ??= (async () => {
  if (app.exitCode === null) app.kill('SIGTERM')
  await ended
  await cluster.stop()
  await rm(dataDir, { recursive: true, force: true })
  process.exit(code)
})()
process.on('disconnect', () => void stop(0))
process.on('SIGTERM', () => void stop(0))
process.on('SIGINT', () => void stop(0))

let output = ''
const timer = setTimeout(() => fail(`not ready within ${START_LIMIT_MS / 1000} s`), START_LIMIT_MS)
const onOutput = (chunk: Buffer) => {
  output += chunk.toString()
  const baseUrl = READY.exec(output)?.[1]
  if (baseUrl) void announce(baseUrl)
}
app.stdout.on('data', onOutput)
app.stderr.on('data', onOutput)
void ended.then(() => stopping ? undefined : fail('ended'))

async function announce(baseUrl: string): Promise<void> {
  clearTimeout(timer)
  app.stdout.off('data', onOutput)
  app.stderr.off('data', onOutput)
  app.stdout.resume()
  app.stderr.pipe(process.stderr)
  const lines = (await readFile(join(dataDir, 'local.env'), 'utf8')).trim().split('\n')
  const settings = Object.fromEntries(lines.map(line => [line.slice(0, line.indexOf('=')), line.slice(line.indexOf('=') + 1)]))
  const info: StackInfo = {
    baseUrl, dataDir,
    databaseUrl: settings.DATABASE_URL!,
    stripeApiBase: settings.STRIPE_API_BASE!,
    stripeSecretKey: settings.STRIPE_SECRET_KEY!,
    stripeWebhookSecret: settings.STRIPE_WEBHOOK_SECRET!,
    mailInboxUrl: settings.MAIL_INBOX_URL!,
  }
  if (process.send) process.send({ ready: info })
  else console.log(JSON.stringify(info, null, 2))
}

function fail(why: string): void {
  const message = `The test stack: ${why}. It said:\n${output}`
  console.error(message)
  process.send?.({ failed: message })
  void stop(1)
}
