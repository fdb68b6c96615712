// What server tests use of the running stack: people, a browser-like client, mails, payments. Each test makes its own
// people and things, so that tests can run in any order on one database.
import { randomUUID } from 'node:crypto'
import type { Kysely } from 'kysely'
import { inject } from 'vitest'
import { openDatabase, type DB } from '../../db/database'
import type { Role } from '../../db/people.table'
import { hashArgon2id } from '../../server/utils/people/passwords'

export const stack = inject('stack')
export const PASSWORD = 'a-drum-key-and-a-rag'

export interface Person { id: string, name: string, email: string, role: Role }

let db: Kysely<DB> | undefined

/** The stack's database, for what has no route: arranging rows, and checking that nothing changed. */
export function database(): Kysely<DB> {
  return db ??= openDatabase(stack.databaseUrl, 2)
}

let hash: Promise<string> | undefined

/** A person with a confirmed address and the password PASSWORD, unless told otherwise. */
export async function createUser(role: Role, changes: { name?: string, email?: string, confirmed?: boolean } = {}): Promise<Person> {
  const email = changes.email ?? `${role}-${randomUUID().slice(0, 8)}@rimwright.test`
  const name = changes.name ?? `Some ${role}`
  const { id } = await database().insertInto('users').values({
    email, name, role, password_hash: await (hash ??= hashArgon2id(PASSWORD)),
    email_confirmed_at: changes.confirmed === false ? null : new Date(), deactivated_at: null,
  }).returning('id').executeTakeFirstOrThrow()
  return { id, name, email, role }
}

export interface Answer<T = unknown> { status: number, body: T, headers: Headers }

/** Speaks HTTP to the app and keeps its cookies, as one browser does. */
export class Client {
  private readonly cookies = new Map<string, string>()

  get = <T = unknown>(path: string) => this.send<T>('GET', path)
  post = <T = unknown>(path: string, body: unknown = {}) => this.send<T>('POST', path, body)
  patch = <T = unknown>(path: string, body: unknown) => this.send<T>('PATCH', path, body)
  put = <T = unknown>(path: string, body: unknown) => this.send<T>('PUT', path, body)
  delete = <T = unknown>(path: string) => this.send<T>('DELETE', path)

  /** Bodies that are FormData or text go as they are; anything else as JSON. */
  async send<T = unknown>(method: string, path: string, body?: unknown, headers: Record<string, string> = {}): Promise<Answer<T>> {
    const asIs = body instanceof FormData || typeof body === 'string' || body === undefined
    const response = await fetch(new URL(path, stack.baseUrl), {
      method,
      redirect: 'manual',
      headers: { ...(asIs ? {} : { 'content-type': 'application/json' }), ...(this.cookies.size ? { cookie: this.cookieHeader() } : {}), ...headers },
      body: asIs ? body : JSON.stringify(body),
    })
    for (const line of response.headers.getSetCookie()) this.keep(line)
    const text = await response.text()
    const isJson = response.headers.get('content-type')?.includes('json') ?? false
    return { status: response.status, body: (isJson && text ? JSON.parse(text) : text) as T, headers: response.headers }
  }

  cookieHeader(): string {
    return [...this.cookies].map(([name, value]) => `${name}=${value}`).join('; ')
  }

  private keep(line: string): void {
    const [pair = '', ...attributes] = line.split(';')
    const name = pair.slice(0, pair.indexOf('=')).trim()
    if (attributes.some(attribute => /^\s*max-age=0\s*$/i.test(attribute))) this.cookies.delete(name)
    else this.cookies.set(name, pair.slice(pair.indexOf('=') + 1))
  }
}

/** A client signed in through the route, as a person does it. */
export async function signIn(person: { email: string }, password = PASSWORD): Promise<Client> {
  const client = new Client()
  const { status, body } = await client.post('/api/auth/sign-in', { email: person.email, password })
  if (status !== 200) throw new Error(`Signing in as ${person.email} gave ${status}: ${JSON.stringify(body)}`)
  return client
}

/** A new person of this role, signed in. */
export async function signInAs(role: Role): Promise<Client & { person: Person }> {
  const person = await createUser(role)
  return Object.assign(await signIn(person), { person })
}

export interface Mail { to: string, subject: string, text: string, html: string | null, at: string }

export async function mailsTo(email: string): Promise<Mail[]> {
  const response = await fetch(`${stack.mailInboxUrl}/messages`)
  return (await response.json() as Mail[]).filter(mail => mail.to.split(', ').includes(email))
}

/** Waits for a mail, which leaves after the request that caused it. */
export async function waitForMail(email: string, holds: (mail: Mail) => boolean = () => true): Promise<Mail> {
  return eventually(async () => (await mailsTo(email)).find(holds), `a mail to ${email}`)
}

/** The value that a look-up finds at last. @throws Error naming what did not come */
export async function eventually<T>(look: () => Promise<T | undefined>, what: string, limitMs = 15_000): Promise<T> {
  const end = Date.now() + limitMs
  for (;;) {
    const found = await look()
    if (found !== undefined) return found
    if (Date.now() > end) throw new Error(`Waited ${limitMs / 1000} s in vain for ${what}`)
    await new Promise(resolve => setTimeout(resolve, 100))
  }
}

export type Scripted = 'pay' | 'decline' | 'expire' | 'pay-later' | 'settle' | 'fail' | 'dispute'

/** Plays the customer or the bank at the payment stand-in. The answer comes after the webhook's first try. */
export async function playPayment(sessionId: string, what: Scripted): Promise<{ status: number, delivered: boolean }> {
  const response = await fetch(`${stack.stripeApiBase}/stand-in/sessions/${sessionId}/${what}`, { method: 'POST' })
  const body = await response.json() as { delivered?: boolean }
  return { status: response.status, delivered: body.delivered ?? false }
}

/** The session's id from a checkout address. */
export function sessionIdOf(checkoutUrl: string): string {
  return new URL(checkoutUrl).pathname.split('/').at(-1)!
}
