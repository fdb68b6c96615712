import { randomUUID } from 'node:crypto'
import { sql } from 'kysely'
import { describe, expect, it } from 'vitest'
import { openDatabase } from '../../db/database'
import { migrateToLatest } from '../../db/migrate'
import { changePerson } from '../../server/utils/people/manage'
import type { PeoplePage } from '../../shared/schemas/people'
import { Client, createUser, database, PASSWORD, signIn, signInAs, stack, waitForMail } from '../support/stack'

const auditOf = (id: string) => database().selectFrom('audit_events').select(['action', 'actor_id', 'detail']).where('subject_id', '=', id).orderBy('id').execute()
const rowOf = (id: string) => database().selectFrom('users').select(['role', 'deactivated_at']).where('id', '=', id).executeTakeFirstOrThrow()

describe('the list of people', () => {
  it('shows everyone to an owner, and customers only to staff and makers', async () => {
    const tag = randomUUID().slice(0, 8)
    const customer = await createUser('customer', { name: `Customer ${tag}` })
    const colleague = await createUser('staff', { name: `Colleague ${tag}` })
    const ids = async (client: Client) => (await client.get<PeoplePage>(`/api/people?q=${tag}`)).body.items.map(person => person.id)
    expect(await ids(await signInAs('owner'))).toEqual([colleague.id, customer.id])
    expect(await ids(await signInAs('staff'))).toEqual([customer.id])
    expect(await ids(await signInAs('maker'))).toEqual([customer.id])
    expect((await (await signInAs('staff')).get<PeoplePage>(`/api/people?q=${tag}&role=staff`)).body.items).toEqual([])
  })

  it('never carries a password or its hash', async () => {
    const owner = await signInAs('owner')
    const { body } = await owner.get<PeoplePage>(`/api/people?q=${owner.person.email}`)
    expect(Object.keys(body.items[0]!).toSorted()).toEqual(['createdAt', 'email', 'id', 'instruments', 'lastSeenAt', 'name', 'role', 'state'])
  })

  it('pages by cursor without losing anyone, also where names are the same', async () => {
    const owner = await signInAs('owner')
    const name = `Twin ${randomUUID().slice(0, 8)}`
    const made = [await createUser('customer', { name }), await createUser('customer', { name }), await createUser('customer', { name: name.toUpperCase() })]
    const seen: string[] = []
    let next: string | null = ''
    while (next !== null) {
      const { body }: { body: PeoplePage } = await owner.get<PeoplePage>(`/api/people?${new URLSearchParams({ q: name, limit: '1', ...(next && { cursor: next }) })}`)
      expect(body.total).toBe(3)
      seen.push(...body.items.map(person => person.id))
      next = body.next
    }
    expect(seen.toSorted()).toEqual(made.map(person => person.id).toSorted())
  })
})

describe('an invitation', () => {
  it('lets the invited person choose a password by mail and come in with the role given', async () => {
    const owner = await signInAs('owner')
    const email = `maker-${randomUUID().slice(0, 8)}@rimwright.test`
    const { status, body } = await owner.post<{ id: string }>('/api/people/invitations', { name: 'Maren Aldous', email, role: 'maker' })
    expect(status).toBe(201)
    const mail = await waitForMail(email)
    const token = /token=([\w-]+)/.exec(mail.text)![1]
    expect((await new Client().post('/api/auth/reset-password', { token, password: PASSWORD })).status).toBe(200)
    expect((await new Client().post('/api/auth/sign-in', { email, password: PASSWORD })).body).toMatchObject({ user: { role: 'maker' } })
    expect(await auditOf(body.id)).toMatchObject([{ action: 'person-invited', actor_id: owner.person.id, detail: { role: 'maker' } }, { action: 'password-reset' }])
  })

  it.each(['staff', 'maker'] as const)('by %s opens accounts of customers only', async (role) => {
    const client = await signInAs(role)
    const invite = (wanted: string) => client.post('/api/people/invitations', { name: 'Some One', email: `i-${randomUUID()}@rimwright.test`, role: wanted })
    expect((await invite('customer')).status).toBe(201)
    for (const wanted of ['owner', 'maker', 'staff']) expect((await invite(wanted)).status).toBe(403)
  })

  it('is sent again, and its first link then fails', async () => {
    const owner = await signInAs('owner')
    const email = `again-${randomUUID().slice(0, 8)}@rimwright.test`
    const { body } = await owner.post<{ id: string }>('/api/people/invitations', { name: 'Again', email, role: 'customer' })
    const first = /token=([\w-]+)/.exec((await waitForMail(email)).text)![1]
    expect((await owner.post(`/api/people/${body.id}/invitation`)).status).toBe(200)
    await waitForMail(email, mail => !mail.text.includes(first!))
    expect((await new Client().post('/api/auth/reset-password', { token: first, password: PASSWORD })).status).toBe(410)
  })

  it('is not sent to somebody who has a password, nor by staff to people of the workshop', async () => {
    const staff = await signInAs('staff')
    const customer = await createUser('customer')
    const maker = await createUser('maker')
    expect((await staff.post(`/api/people/${customer.id}/invitation`)).status).toBe(409)
    expect((await staff.post(`/api/people/${maker.id}/invitation`)).status).toBe(404)
  })
})

describe('changing an account', () => {
  it('gives a new role, ends the sessions at once and says so in the audit trail', async () => {
    const owner = await signInAs('owner')
    const person = await createUser('staff')
    const theirs = await signIn(person)
    expect((await owner.patch(`/api/people/${person.id}`, { role: 'maker' })).status).toBe(200)
    expect((await theirs.get('/api/readings')).status).toBe(401)
    expect((await new Client().post('/api/auth/sign-in', { email: person.email, password: PASSWORD })).body).toMatchObject({ user: { role: 'maker' } })
    expect(await auditOf(person.id)).toEqual([{ action: 'role-changed', actor_id: owner.person.id, detail: { from: 'staff', to: 'maker' } }])
  })

  it('closes an account at once and opens it again', async () => {
    const owner = await signInAs('owner')
    const person = await createUser('customer')
    const theirs = await signIn(person)
    expect((await owner.patch(`/api/people/${person.id}`, { active: false })).status).toBe(200)
    expect((await theirs.get('/api/readings')).status).toBe(401)
    await expect(signIn(person)).rejects.toThrow('gave 401')
    expect((await owner.patch(`/api/people/${person.id}`, { active: true })).status).toBe(200)
    await signIn(person)
    expect((await auditOf(person.id)).map(entry => entry.action)).toEqual(['person-deactivated', 'person-reactivated'])
  })

  it('withdraws links that were already mailed when it closes an account', async () => {
    const owner = await signInAs('owner')
    const person = await createUser('customer')
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const token = /token=([\w-]+)/.exec((await waitForMail(person.email)).text)![1]
    await owner.patch(`/api/people/${person.id}`, { active: false })
    expect((await new Client().post('/api/auth/reset-password', { token, password: PASSWORD })).status).toBe(410)
  })

  it('is refused for oneself', async () => {
    const owner = await signInAs('owner')
    for (const patch of [{ role: 'staff' }, { active: false }]) {
      expect((await owner.patch(`/api/people/${owner.person.id}`, patch)).status).toBe(409)
    }
    expect(await rowOf(owner.person.id)).toEqual({ role: 'owner', deactivated_at: null })
  })

  it('leaves an owner when two owners remove each other at the same moment', async () => {
    const [one, two] = [await signInAs('owner'), await signInAs('owner')]
    const answers = await Promise.all([one.patch(`/api/people/${two.person.id}`, { role: 'staff' }), two.patch(`/api/people/${one.person.id}`, { role: 'staff' })])
    // The second is refused at the door (401, its session is gone) or behind it (403), as the moment falls.
    expect(answers.filter(answer => answer.status === 200)).toHaveLength(1)
    expect(answers.filter(answer => answer.status === 401 || answer.status === 403)).toHaveLength(1)
    const roles = [(await rowOf(one.person.id)).role, (await rowOf(two.person.id)).role]
    expect(roles.toSorted()).toEqual(['owner', 'staff'])
  })

  it('never leaves the workshop without an owner', async () => {
    // A database of its own: the shared one has owners of other tests.
    const name = `owners_${randomUUID().slice(0, 8)}`
    await sql`create database ${sql.id(name)}`.execute(database())
    const url = Object.assign(new URL(stack.databaseUrl), { pathname: `/${name}` }).href
    await migrateToLatest(url)
    const db = openDatabase(url, 2)
    try {
      const add = (email: string) => db.insertInto('users').values({ email, name: email, role: 'owner', password_hash: null, email_confirmed_at: null, deactivated_at: null }).returningAll().executeTakeFirstOrThrow()
      const [one, two] = [await add('one@rimwright.test'), await add('two@rimwright.test')]
      await changePerson(db, two.id, { active: false }, one)
      await expect(changePerson(db, one.id, { role: 'staff' }, one)).rejects.toMatchObject({ code: 'conflict' })
      // Whoever was closed a moment ago is no owner any more, whatever the session still said.
      await expect(changePerson(db, one.id, { role: 'staff' }, two)).rejects.toMatchObject({ code: 'not-allowed' })
      const rows = await db.selectFrom('users').select(['email', 'role']).where('deactivated_at', 'is', null).execute()
      expect(rows).toEqual([{ email: 'one@rimwright.test', role: 'owner' }])
    } finally {
      await db.destroy()
      await sql`drop database ${sql.id(name)} with (force)`.execute(database())
    }
  })

  it('is refused to everyone but an owner, and for somebody who is not there', async () => {
    const person = await createUser('customer')
    for (const role of ['maker', 'staff', 'customer'] as const) {
      expect((await (await signInAs(role)).patch(`/api/people/${person.id}`, { role: 'owner' })).status).toBe(403)
    }
    expect((await rowOf(person.id)).role).toBe('customer')
    expect((await (await signInAs('owner')).patch(`/api/people/${randomUUID()}`, { role: 'owner' })).status).toBe(404)
  })

  it('is refused without a change, and with a role that there is not', async () => {
    const owner = await signInAs('owner')
    const person = await createUser('customer')
    expect((await owner.patch(`/api/people/${person.id}`, {})).status).toBe(400)
    expect((await owner.patch(`/api/people/${person.id}`, { role: 'conductor' })).status).toBe(400)
  })
})
