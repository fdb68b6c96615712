import { spawn } from 'node:child_process'
import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import pg from 'pg'
import { migrateToLatest } from '../../db/migrate'
import { cleanEnv, root } from '../../scripts/start-lib.mjs'
import { stack } from '../support/stack'

// A database of its own: the shared one has owners that other tests made.
describe('npm run owner:create', { timeout: 120_000 }, () => {
  const name = `owner_${randomUUID().slice(0, 8)}`
  const url = new URL(stack.databaseUrl)
  url.pathname = `/${name}`
  const admin = new pg.Client({ connectionString: stack.databaseUrl })
  beforeAll(async () => {
    await admin.connect()
    await admin.query(`create database ${name}`)
    await migrateToLatest(url.href)
  })
  afterAll(async () => {
    await admin.query(`drop database ${name} with (force)`)
    await admin.end()
  })

  const create = (args: string[], env: Record<string, string> = {}) => new Promise<{ code: number | null, text: string }>((resolve) => {
    const child = spawn('npm', ['run', '--silent', 'owner:create', '--', ...args], { cwd: root, env: { ...cleanEnv(), DATABASE_URL: url.href, ...env }, stdio: ['ignore', 'pipe', 'pipe'] })
    let text = ''
    child.stdout.on('data', chunk => text += String(chunk))
    child.stderr.on('data', chunk => text += String(chunk))
    child.once('close', code => resolve({ code, text }))
  })
  const owners = async () => {
    const client = new pg.Client({ connectionString: url.href })
    await client.connect()
    const { rows } = await client.query<{ email: string, role: string, hash: string }>('select email, role, password_hash as hash from users')
    await client.end()
    return rows
  }

  it('refuses a weak password and makes nobody', async () => {
    const { code, text } = await create(['--email', 'first@rimwright.test', '--name', 'Ina Alder', '--password', 'short'])
    expect(code).toBe(1)
    expect(text).toContain('at least 10 characters')
    expect(await owners()).toEqual([])
  })

  it('asks for nothing where there is no terminal, and says what is missing', async () => {
    const { code, text } = await create(['--email', 'first@rimwright.test', '--name', 'Ina Alder'])
    expect(code).toBe(1)
    expect(text).toContain('RIMWRIGHT_PASSWORD')
  })

  it('creates the first owner with a hashed password, and refuses a second', async () => {
    const first = await create(['--email', 'First@Rimwright.test', '--name', 'Ina Alder'], { RIMWRIGHT_PASSWORD: 'long-enough-for-a-rim' })
    expect(first).toMatchObject({ code: 0 })
    const rows = await owners()
    expect(rows).toMatchObject([{ email: 'first@rimwright.test', role: 'owner' }])
    expect(rows[0]!.hash).toMatch(/^\$argon2id\$/)
    const second = await create(['--email', 'second@rimwright.test', '--name', 'Bo Tarn', '--password', 'long-enough-for-a-rim'])
    expect(second.code).toBe(1)
    expect(second.text).toContain('There is an owner already')
    expect(await owners()).toHaveLength(1)
  })
})
