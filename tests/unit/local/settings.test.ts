import { mkdtemp, readFile, rm, stat, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { appSettings, ensureState, needsPaymentStandIn, readChoices, writeLocalEnv, type Running } from '../../../local/settings'

const ROOT = '/srv/rimwright'
let dataDir: string
beforeEach(async () => {
  dataDir = await mkdtemp(join(tmpdir(), 'rimwright-settings-'))
})
afterEach(() => rm(dataDir, { recursive: true }))

const running: Running = {
  port: 3000, databaseUrl: 'postgresql://r:p@127.0.0.1:5432/rimwright', dataDir: '/data', publicUrl: 'http://127.0.0.1:3000',
  stripeApiBase: 'http://127.0.0.1:4001', smtpUrl: 'smtp://127.0.0.1:4002', mailInboxUrl: 'http://127.0.0.1:4003',
}

describe('choices by environment', () => {
  it('need nothing', () => {
    const choices = readChoices({}, ROOT)
    expect(choices).toMatchObject({ port: 3000, dataDir: '/srv/rimwright/.data', demo: true })
    expect(needsPaymentStandIn(choices)).toBe(true)
  })

  it('take a relative data folder from where the caller stands', () => {
    expect(readChoices({ DATA_DIR: 'shop' }, ROOT, '/home/ina').dataDir).toBe('/home/ina/shop')
  })

  it.each(['x', '70000', '-1', '3.5'])('refuse the port %s in words', (PORT) => {
    expect(() => readChoices({ PORT }, ROOT)).toThrow('PORT is a number')
  })

  it('mean the real payment service by a key alone, which then needs its webhook secret', () => {
    expect(() => readChoices({ STRIPE_SECRET_KEY: 'sk_live_1' }, ROOT)).toThrow('STRIPE_WEBHOOK_SECRET')
    const choices = readChoices({ STRIPE_SECRET_KEY: 'sk_live_1', STRIPE_WEBHOOK_SECRET: 'whsec_1' }, ROOT)
    expect(needsPaymentStandIn(choices)).toBe(false)
  })

  it('start no second payment stand-in where an address for one is given', () => {
    expect(needsPaymentStandIn(readChoices({ STRIPE_API_BASE: 'http://127.0.0.1:9' }, ROOT))).toBe(false)
  })
})

describe('secrets', () => {
  it('are made once, differ from each other, and only their owner may read them', async () => {
    const first = await ensureState(dataDir)
    expect(await ensureState(dataDir)).toEqual(first)
    const secrets = Object.values(first).filter(value => typeof value === 'string')
    expect(new Set(secrets).size).toBe(secrets.length)
    // nuxt-auth-utils' documentation asks for 32 characters or more.
    expect(first.sessionPassword.length).toBeGreaterThanOrEqual(32)
    expect((await stat(join(dataDir, 'state.json'))).mode & 0o777).toBe(0o600)
  })

  it('are not replaced when their file is damaged: the database would be locked out', async () => {
    await writeFile(join(dataDir, 'state.json'), '{"sessionPassword":')
    await expect(ensureState(dataDir)).rejects.toThrow('state.json')
    await writeFile(join(dataDir, 'state.json'), '{}')
    await expect(ensureState(dataDir)).rejects.toThrow('damaged')
  })
})

describe('local.env', () => {
  const write = async (env: NodeJS.ProcessEnv) => {
    const choices = { ...readChoices(env, ROOT), dataDir }
    await writeLocalEnv(choices, appSettings(choices, await ensureState(dataDir), running))
    return readFile(join(dataDir, 'local.env'), 'utf8')
  }

  it('has the addresses and secrets that were made, one KEY=value a line, for its owner alone', async () => {
    const text = await write({})
    for (const line of text.trimEnd().split('\n')) expect(line).toMatch(/^[A-Z_]+=[^\s&<>"']+$/)
    expect(text).toContain('DATABASE_URL=postgresql://r:p@127.0.0.1:5432/rimwright\n')
    expect(text).toContain('STRIPE_API_BASE=http://127.0.0.1:4001\n')
    expect(text).toContain('MAIL_INBOX_URL=http://127.0.0.1:4003\n')
    expect(text).toMatch(/^STRIPE_WEBHOOK_SECRET=whsec_/m)
    expect((await stat(join(dataDir, 'local.env'))).mode & 0o777).toBe(0o600)
  })

  it('does not repeat secrets that the caller gave', async () => {
    const text = await write({ STRIPE_SECRET_KEY: 'sk_live_1', STRIPE_WEBHOOK_SECRET: 'whsec_1' })
    expect(text).not.toContain('sk_live_1')
    expect(text).not.toContain('whsec_1')
  })
})

it('hands the app what the caller gave before what was made', async () => {
  const choices = readChoices({ STRIPE_SECRET_KEY: 'sk_live_1', STRIPE_WEBHOOK_SECRET: 'whsec_1', MAIL_FROM: 'shop@example.test' }, ROOT)
  expect(appSettings(choices, await ensureState(dataDir), running)).toMatchObject({ STRIPE_SECRET_KEY: 'sk_live_1', STRIPE_WEBHOOK_SECRET: 'whsec_1', MAIL_FROM: 'shop@example.test' })
})
