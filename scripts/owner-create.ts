// Creates the first owner of an installation without demo data: npm run owner:create -- --email … --name …
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { createInterface } from 'node:readline/promises'
import { parseArgs } from 'node:util'
import { sql } from 'kysely'
import { z } from 'zod'
import { openDatabase } from '../db/database'
import { hashArgon2id } from '../server/utils/people/passwords'
import { emailSchema, nameSchema, passwordSchema } from '../shared/schemas/common'

const person = z.object({ email: emailSchema, name: nameSchema, password: passwordSchema })

async function main(): Promise<string> {
  const { values } = parseArgs({ options: { email: { type: 'string' }, name: { type: 'string' }, password: { type: 'string' } } })
  const parsed = person.safeParse({
    email: values.email ?? await ask('E-mail address: ', 'email'),
    name: values.name ?? await ask('Name: ', 'name'),
    password: values.password ?? process.env.RIMWRIGHT_PASSWORD ?? await ask('Password (10 characters or more): ', 'password', true),
  })
  if (!parsed.success) throw new Error(parsed.error.issues.map(issue => `${issue.path.join('.')}: ${issue.message}`).join('\n'))
  const { email, name, password } = parsed.data
  const passwordHash = await hashArgon2id(password)
  const db = openDatabase(databaseUrl(), 1)
  try {
    return await db.transaction().execute(async (trx) => {
      // Two of these at once must not make two first owners.
      await sql`lock table users in share row exclusive mode`.execute(trx)
      const owner = await trx.selectFrom('users').select('email').where('role', '=', 'owner').executeTakeFirst()
      if (owner) throw new Error(`There is an owner already: ${owner.email}. Owners invite others on the page People.`)
      const taken = await trx.selectFrom('users').select('id').where('email', '=', email).executeTakeFirst()
      if (taken) throw new Error(`There is an account with the address ${email} already. Choose another.`)
      const { id } = await trx.insertInto('users')
        .values({ email, name, role: 'owner', password_hash: passwordHash, email_confirmed_at: new Date(), deactivated_at: null })
        .returning('id').executeTakeFirstOrThrow()
      await trx.insertInto('audit_events')
        .values({ actor_id: id, action: 'owner-created', subject_type: 'user', subject_id: id, detail: JSON.stringify({}) }).execute()
      return `Created the owner ${email}. Sign in with this address.`
    })
  } finally {
    await db.destroy()
  }
}

/** The environment's, else the one that the start command wrote. */
function databaseUrl(): string {
  if (process.env.DATABASE_URL) return process.env.DATABASE_URL
  const file = join(process.env.DATA_DIR ?? '.data', 'local.env')
  let text: string
  try {
    text = readFileSync(file, 'utf8')
  } catch {
    throw new Error(`No database found: start with ./docker-free-start.sh and leave it running (it writes ${file}), or set DATABASE_URL.`)
  }
  const url = /^DATABASE_URL=(.+)$/m.exec(text)?.[1]
  if (!url) throw new Error(`${file} names no DATABASE_URL.`)
  return url
}

async function ask(question: string, name: string, hidden = false): Promise<string> {
  if (!process.stdin.isTTY) throw new Error(`Give --${name}${hidden ? ' or RIMWRIGHT_PASSWORD' : ''}: there is no terminal to ask at.`)
  // Without an output the terminal's line editor echoes nothing.
  if (hidden) process.stdout.write(question)
  const lines = createInterface({ input: process.stdin, output: hidden ? undefined : process.stdout, terminal: true })
  try {
    return await lines.question(hidden ? '' : question)
  } finally {
    lines.close()
    if (hidden) process.stdout.write('\n')
  }
}

try {
  console.log(await main())
} catch (error) {
  console.error(error instanceof Error ? error.message : error)
  process.exitCode = 1
}
