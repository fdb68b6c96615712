// The start command as a person runs it, on a folder of its own with a cluster of its own. The stack that other tests
// use has built the app already.
import { spawn, type ChildProcess } from 'node:child_process'
import { existsSync } from 'node:fs'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { chmod, mkdtemp, readFile, rm, stat } from 'node:fs/promises'
import { availableParallelism, loadavg, tmpdir } from 'node:os'
import { join } from 'node:path'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { cleanEnv, root } from '../../scripts/start-lib.mjs'

interface Started { child: ChildProcess, url: string, seconds: number, ended: Promise<number | null>, output: () => string }

const children: ChildProcess[] = []
let dataDir: string

/** Starts and waits for the ready line; without one, for the end. */
async function start(env: Record<string, string> = {}): Promise<Started> {
  const from = Date.now()
  const child = spawn(join(root, 'docker-free-start.sh'), [], { env: { ...cleanEnv(), DATA_DIR: dataDir, PORT: '0', DEMO: '0', ...env }, stdio: ['ignore', 'pipe', 'pipe'] })
  children.push(child)
  let text = ''
  const ended = new Promise<number | null>(resolve => child.once('exit', resolve))
  const url = await new Promise<string>((resolve) => {
    const read = (chunk: Buffer) => {
      text += chunk.toString()
      const ready = /^Rimwright is ready at (\S+)$/m.exec(text)
      if (ready) resolve(ready[1]!)
    }
    child.stdout.on('data', read)
    child.stderr.on('data', read)
    void ended.then(() => resolve(''))
  })
  return { child, url, seconds: (Date.now() - from) / 1000, ended, output: () => text }
}

async function settings(): Promise<Record<string, string>> {
  const lines = (await readFile(join(dataDir, 'local.env'), 'utf8')).trim().split('\n')
  return Object.fromEntries(lines.map(line => [line.slice(0, line.indexOf('=')), line.slice(line.indexOf('=') + 1)]))
}

const answers = (url: string) => fetch(url, { signal: AbortSignal.timeout(2000) }).then(response => response.status, () => undefined)

// Several starts in a test, each of some seconds on an idle machine.
describe('the start command', { timeout: 180_000 }, () => {
  beforeAll(async () => {
    dataDir = await mkdtemp(join(tmpdir(), 'rimwright-start-'))
    await chmod(dataDir, 0o711)
  })
  afterAll(async () => {
    for (const child of children) child.kill('SIGTERM')
    await Promise.all(children.map(child => child.exitCode === null && child.signalCode === null ? new Promise(resolve => child.once('exit', resolve)) : undefined))
    await rm(dataDir, { recursive: true, force: true })
  })

  it('serves, keeps its settings to itself, refuses a second start, and stops all on SIGTERM', async () => {
    const first = await start()
    expect(first.url, first.output()).toMatch(/^http:\/\/127\.0\.0\.1:\d+$/)
    expect(await answers(`${first.url}/api/health`)).toBe(200)
    expect((await stat(join(dataDir, 'local.env'))).mode & 0o777).toBe(0o600)
    const { DATABASE_URL, STRIPE_API_BASE, MAIL_INBOX_URL } = await settings()
    expect(await answers(`${MAIL_INBOX_URL}/messages`)).toBe(200)

    const second = await start()
    expect(second.url).toBe('')
    expect(second.output()).toContain('already runs on')
    expect(await answers(`${first.url}/api/health`)).toBe(200)

    first.child.kill('SIGTERM')
    expect(await first.ended).toBe(0)
    expect(await Promise.all([`${first.url}/api/health`, STRIPE_API_BASE!, MAIL_INBOX_URL!].map(answers))).toEqual([undefined, undefined, undefined])
    await expect(new pg.Client({ connectionString: DATABASE_URL }).connect()).rejects.toThrow('ECONNREFUSED')
  })

  it('starts again within 10 s with the same addresses and secrets, also after it was killed', async () => {
    const before = await settings()
    const first = await start()
    // 10 s: contract for a start with everything in place. Other test files run beside this one, so it is stretched by how many of them want each core.
    const stretch = Math.max(1, loadavg()[0]! / availableParallelism())
    expect(first.seconds).toBeLessThan(10 * stretch)
    expect(first.output().trim()).toBe(`Rimwright is ready at ${first.url}`)
    const same = ['DATABASE_URL', 'STRIPE_API_BASE', 'STRIPE_WEBHOOK_SECRET', 'SMTP_URL', 'SESSION_PASSWORD']
    const pick = (all: Record<string, string>) => same.map(name => all[name])
    expect(pick(await settings())).toEqual(pick(before))

    first.child.kill('SIGKILL')
    await first.ended
    const second = await start({ PORT: new URL(first.url).port })
    expect(second.url, second.output()).toBe(first.url)
    second.child.kill('SIGINT')
    expect(await second.ended).toBe(0)
  })

  it('says in words which port is taken, and leaves nothing running', async () => {
    const blocker = createServer().listen(0, '127.0.0.1')
    await new Promise(resolve => blocker.once('listening', resolve))
    const port = String((blocker.address() as AddressInfo).port)
    const refused = await start({ PORT: port })
    await new Promise(resolve => blocker.close(resolve))
    expect(refused.output()).toContain(`Port ${port} is taken`)
    expect(await refused.ended).toBe(1)
    expect(existsSync(join(dataDir, 'postgres/data/postmaster.pid'))).toBe(false)
  })

  it('refuses to use the real payment service without a webhook secret', async () => {
    const refused = await start({ STRIPE_SECRET_KEY: 'sk_live_x' })
    expect(refused.output()).toContain('STRIPE_WEBHOOK_SECRET')
    expect(await refused.ended).toBe(1)
  })
})
