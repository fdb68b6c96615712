import { randomBytes } from 'node:crypto'
import { join, resolve } from 'node:path'
import { z } from 'zod'
import { readJson, writeWhole } from './files'

/** What the caller of the start command chose by environment. */
export interface Choices {
  port: number
  dataDir: string
  demo: boolean
  databaseUrl?: string
  publicUrl?: string
  stripeSecretKey?: string
  stripeWebhookSecret?: string
  stripeApiBase?: string
  smtpUrl?: string
  mailInboxUrl?: string
  mailFrom?: string
}

/** Made at the first start and kept, so that sessions, signatures and addresses outlive a restart. */
const stateSchema = z.object({
  superuserPassword: z.string(),
  databasePassword: z.string(),
  sessionPassword: z.string(),
  stripeSecretKey: z.string(),
  stripeWebhookSecret: z.string(),
  ports: z.object({ postgres: z.number(), payments: z.number(), smtp: z.number(), inbox: z.number() }).partial(),
})
export type State = z.infer<typeof stateSchema>

// Without a display name: the lines of local.env must be readable by a shell too.
const MAIL_FROM = 'workshop@rimwright.test'

/** @throws Error in words for the person who started the command */
export function readChoices(env: NodeJS.ProcessEnv, root: string, cwd = process.cwd()): Choices {
  const given = (name: string) => env[name]?.trim() || undefined
  const port = Number(given('PORT') ?? 3000)
  if (!Number.isInteger(port) || port < 0 || port > 65_535) throw new Error(`PORT is a number from 0 to 65535 (0: any free one), not "${env.PORT}".`)
  const choices: Choices = {
    port,
    dataDir: env.DATA_DIR ? resolve(cwd, env.DATA_DIR) : join(root, '.data'),
    demo: given('DEMO') !== '0',
    databaseUrl: given('DATABASE_URL'),
    publicUrl: given('PUBLIC_URL'),
    stripeSecretKey: given('STRIPE_SECRET_KEY'),
    stripeWebhookSecret: given('STRIPE_WEBHOOK_SECRET'),
    stripeApiBase: given('STRIPE_API_BASE'),
    smtpUrl: given('SMTP_URL'),
    mailInboxUrl: given('MAIL_INBOX_URL'),
    mailFrom: given('MAIL_FROM'),
  }
  if (usesRealPayments(choices) && !choices.stripeWebhookSecret) {
    throw new Error('STRIPE_SECRET_KEY without STRIPE_API_BASE means the real payment service: set STRIPE_WEBHOOK_SECRET too, from the webhook\'s page in its dashboard.')
  }
  return choices
}

/** A key and no other address for it: the real service. */
export function usesRealPayments(choices: Choices): boolean {
  return choices.stripeSecretKey !== undefined && choices.stripeApiBase === undefined
}

export function needsPaymentStandIn(choices: Choices): boolean {
  return choices.stripeSecretKey === undefined && choices.stripeApiBase === undefined
}

export async function ensureState(dataDir: string): Promise<State> {
  const file = stateFile(dataDir)
  const stored = readJson(file)
  if (stored !== undefined) {
    const parsed = stateSchema.safeParse(stored)
    if (parsed.success) return parsed.data
    throw new Error(`${file} is damaged. It holds the database's passwords: restore it, or move ${dataDir} away to start afresh.`)
  }
  const secret = () => randomBytes(24).toString('base64url')
  const state: State = {
    superuserPassword: secret(),
    databasePassword: secret(),
    sessionPassword: secret() + secret(),
    stripeSecretKey: `sk_test_local_${secret()}`,
    stripeWebhookSecret: `whsec_${secret()}`,
    ports: {},
  }
  await saveState(dataDir, state)
  return state
}

export function saveState(dataDir: string, state: State): Promise<void> {
  return writeWhole(stateFile(dataDir), `${JSON.stringify(state, null, 2)}\n`)
}

function stateFile(dataDir: string): string {
  return join(dataDir, 'state.json')
}

/** Everything that the app is run with. */
export interface Running {
  port: number
  databaseUrl: string
  dataDir: string
  publicUrl: string
  stripeApiBase?: string
  smtpUrl: string
  mailInboxUrl?: string
}

/** The app's settings by their plain names. */
export function appSettings(choices: Choices, state: State, running: Running): Record<string, string> {
  const settings: Record<string, string | undefined> = {
    DATABASE_URL: running.databaseUrl,
    DATA_DIR: running.dataDir,
    PUBLIC_URL: running.publicUrl,
    STRIPE_SECRET_KEY: choices.stripeSecretKey ?? state.stripeSecretKey,
    STRIPE_WEBHOOK_SECRET: choices.stripeWebhookSecret ?? state.stripeWebhookSecret,
    STRIPE_API_BASE: running.stripeApiBase,
    SMTP_URL: running.smtpUrl,
    MAIL_INBOX_URL: running.mailInboxUrl,
    MAIL_FROM: choices.mailFrom ?? MAIL_FROM,
    SESSION_PASSWORD: state.sessionPassword,
  }
  return Object.fromEntries(Object.entries(settings).filter((entry): entry is [string, string] => entry[1] !== undefined))
}

/**
 * DATA_DIR/local.env, for scripts: what the start command made or chose. Secrets that the caller gave are left out;
 * addresses are always there.
 */
export async function writeLocalEnv(choices: Choices, settings: Record<string, string>): Promise<void> {
  const withheld = [choices.stripeSecretKey && 'STRIPE_SECRET_KEY', choices.stripeWebhookSecret && 'STRIPE_WEBHOOK_SECRET']
  const lines = Object.entries(settings).filter(([name]) => !withheld.includes(name)).map(([name, value]) => `${name}=${value}`)
  await writeWhole(join(choices.dataDir, 'local.env'), `${lines.join('\n')}\n`)
}
