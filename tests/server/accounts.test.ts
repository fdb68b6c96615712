import { randomUUID } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { Client, createUser, database, eventually, type Mail, mailsTo, PASSWORD, signIn, waitForMail } from '../support/stack'

const newAddress = () => `a-${randomUUID().slice(0, 12)}@rimwright.test`
const tokenOf = (mail: Mail) => /[?&]token=([\w-]+)/.exec(mail.text)![1]!
const NEW_PASSWORD = 'a-new-drum-key-and-a-rag'
const me = (client: Client) => client.get('/api/readings?limit=1')

async function signUp(changes: Record<string, string> = {}) {
  const person = { name: 'Ilse Brandt', email: newAddress(), password: PASSWORD, ...changes }
  return { person, answer: await new Client().post<{ message: string, data?: { issues: { path: string, message: string }[] } }>('/api/auth/sign-up', person) }
}

describe('opening an account', () => {
  it('lets a customer in only after the mailed link was followed', async () => {
    const { person, answer } = await signUp()
    expect(answer.status).toBe(201)
    const client = new Client()
    const early = await client.post<{ message: string }>('/api/auth/sign-in', person)
    expect(early.status).toBe(403)
    expect(early.body.message).toMatch(/confirm your e-mail/i)
    const token = tokenOf(await waitForMail(person.email, mail => mail.subject === 'Confirm your e-mail address'))
    expect((await client.post('/api/auth/confirm-email', { token })).status).toBe(200)
    const { status, body } = await client.post('/api/auth/sign-in', person)
    expect(status).toBe(200)
    expect(body).toEqual({ user: { id: expect.any(String), name: 'Ilse Brandt', email: person.email, role: 'customer' } })
    expect((await me(client)).status).toBe(200)
  })

  it('never gives more than the role of a customer, whatever is sent along', async () => {
    const { person } = await signUp({ role: 'owner' })
    const row = await database().selectFrom('users').select('role').where('email', '=', person.email).executeTakeFirstOrThrow()
    expect(row.role).toBe('customer')
  })

  it('says that an address has an account, in any spelling of case, and changes nothing', async () => {
    const known = await createUser('customer', { name: 'First' })
    const { answer } = await signUp({ email: known.email.toUpperCase(), name: 'Second' })
    expect(answer.status).toBe(409)
    expect(answer.body.data?.issues).toEqual([{ path: 'email', message: 'This address has an account already.' }])
    const rows = await database().selectFrom('users').select('name').where('email', '=', known.email).execute()
    expect(rows).toEqual([{ name: 'First' }])
  })

  it.each([
    [{ password: 'short' }, 'password', 'Use at least 10 characters.'],
    [{ email: 'nobody' }, 'email', 'Write the e-mail address in full, like name@example.org.'],
    [{ name: ' ' }, 'name', 'Fill this in.'],
  ])('refuses %o beside the field', async (changes, path, message) => {
    const { answer } = await signUp(changes)
    expect(answer.status).toBe(400)
    expect(answer.body.data?.issues).toEqual([{ path, message }])
  })

  it('sends the confirmation again to whoever knows the password, and to nobody else', async () => {
    const person = await createUser('customer', { confirmed: false })
    const wrong = await new Client().post('/api/auth/confirmation', { email: person.email, password: 'not the password' })
    expect(wrong.status).toBe(401)
    expect((await new Client().post('/api/auth/confirmation', { email: person.email, password: PASSWORD })).status).toBe(200)
    await waitForMail(person.email)
    expect(await mailsTo(person.email)).toHaveLength(1)
  })
})

describe('a mailed link', () => {
  it('works once', async () => {
    const person = await createUser('customer')
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const token = tokenOf(await waitForMail(person.email))
    const attempts = await Promise.all([1, 2, 3].map(n => new Client().post('/api/auth/reset-password', { token, password: `${NEW_PASSWORD}-${n}` })))
    expect(attempts.map(attempt => attempt.status).toSorted()).toEqual([200, 410, 410])
  })

  it('stops working when its time is over', async () => {
    const person = await createUser('customer')
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const token = tokenOf(await waitForMail(person.email))
    await database().updateTable('user_tokens').set({ expires_at: new Date(Date.now() - 1000) }).where('user_id', '=', person.id).execute()
    const { status, body } = await new Client().post<{ message: string }>('/api/auth/reset-password', { token, password: NEW_PASSWORD })
    expect(status).toBe(410)
    expect(body.message).toBe('This link has expired or was used already. Ask for a new one.')
    await signIn(person)
  })

  it('of one kind does not do the work of another', async () => {
    const { person } = await signUp()
    const token = tokenOf(await waitForMail(person.email))
    expect((await new Client().post('/api/auth/reset-password', { token, password: NEW_PASSWORD })).status).toBe(410)
  })

  it('is kept in the database only as its hash', async () => {
    const person = await createUser('customer')
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const token = tokenOf(await waitForMail(person.email))
    const rows = await database().selectFrom('user_tokens').selectAll().where('user_id', '=', person.id).execute()
    expect(JSON.stringify(rows)).not.toContain(token)
    const jobs = await database().selectFrom('pgboss.job' as never).selectAll().execute()
    expect(JSON.stringify(jobs)).not.toContain(token)
  })

  it('stops working once another link has set a password', async () => {
    const person = await createUser('customer')
    for (let n = 0; n < 2; n++) await new Client().post('/api/auth/forgot-password', { email: person.email })
    const [one, two] = await eventually(async () => {
      const mails = await mailsTo(person.email)
      return mails.length === 2 ? mails.map(tokenOf) : undefined
    }, 'two letters')
    expect((await new Client().post('/api/auth/reset-password', { token: one, password: NEW_PASSWORD })).status).toBe(200)
    expect((await new Client().post('/api/auth/reset-password', { token: two, password: `${NEW_PASSWORD}!` })).status).toBe(410)
  })
})

describe('a forgotten password', () => {
  it('answers the same for a known and an unknown address, and writes to the known one only', async () => {
    const person = await createUser('customer')
    const nobody = newAddress()
    const known = await new Client().post('/api/auth/forgot-password', { email: person.email })
    const unknown = await new Client().post('/api/auth/forgot-password', { email: nobody })
    expect([unknown.status, unknown.body]).toEqual([known.status, known.body])
    await waitForMail(person.email)
    expect(await mailsTo(nobody)).toEqual([])
  })

  it('takes as long for an unknown address as for a known one', async () => {
    const person = await createUser('customer')
    const time = async (email: string) => {
      const start = performance.now()
      await new Client().post('/api/auth/forgot-password', { email })
      return performance.now() - start
    }
    // The route's floor is 150 ms; a few less for the rounding of timers. Without it an unknown address answers in a tenth of that.
    expect(await time(newAddress())).toBeGreaterThan(140)
    expect(await time(person.email)).toBeGreaterThan(140)
  })

  it('sets a new password, ends every session and lets the old password go', async () => {
    const person = await createUser('customer')
    const before = await signIn(person)
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const token = tokenOf(await waitForMail(person.email, mail => mail.subject === 'Choose a new password'))
    expect((await new Client().post('/api/auth/reset-password', { token, password: NEW_PASSWORD })).status).toBe(200)
    expect((await me(before)).status).toBe(401)
    await expect(signIn(person)).rejects.toThrow('gave 401')
    await signIn(person, NEW_PASSWORD)
  })

  it('never confirms the password of a stranger who opened an account for the address', async () => {
    const { person } = await signUp({ password: 'the-password-of-a-stranger' })
    await new Client().post('/api/auth/forgot-password', { email: person.email })
    const mail = await waitForMail(person.email, letter => letter.subject === 'Choose a new password')
    expect((await new Client().post('/api/auth/reset-password', { token: tokenOf(mail), password: NEW_PASSWORD })).status).toBe(200)
    await expect(signIn(person, 'the-password-of-a-stranger')).rejects.toThrow('gave 401')
    await signIn(person, NEW_PASSWORD)
  })

  it('writes at most five letters to one address in a quarter of an hour, and does not say so', async () => {
    const person = await createUser('customer')
    for (let n = 0; n < 7; n++) expect((await new Client().post('/api/auth/forgot-password', { email: person.email })).status).toBe(200)
    await eventually(async () => (await mailsTo(person.email)).length >= 5 || undefined, 'five letters')
    const jobs = await database().selectFrom('user_tokens').select('id').where('user_id', '=', person.id).execute()
    expect(jobs).toHaveLength(5)
  })
})

describe('a session', () => {
  it('ends everywhere at once when its person asks for it', async () => {
    const person = await createUser('maker')
    const [here, there] = [await signIn(person), await signIn(person)]
    expect((await here.post('/api/auth/sign-out-everywhere')).status).toBe(200)
    expect([(await me(here)).status, (await me(there)).status]).toEqual([401, 401])
  })

  it('cannot be used again after signing out, even with the old cookie', async () => {
    const client = await signIn(await createUser('customer'))
    const cookie = client.cookieHeader()
    await client.post('/api/auth/sign-out')
    const { status } = await new Client().send('GET', '/api/readings', undefined, { cookie })
    expect(status).toBe(401)
  })

  it('tells the page that it was ended from elsewhere', async () => {
    const person = await createUser('customer')
    const client = await signIn(person)
    await database().updateTable('sessions').set({ revoked_at: new Date() }).where('user_id', '=', person.id).execute()
    const { status, body } = await client.get('/api/_auth/session')
    expect(status).toBe(200)
    expect(body).toMatchObject({ ended: true })
    expect(body).not.toHaveProperty('user')
  })

  it('ends after thirty days without use', async () => {
    const person = await createUser('customer')
    const client = await signIn(person)
    await database().updateTable('sessions').set({ last_seen_at: new Date(Date.now() - 31 * 24 * 3600_000) }).where('user_id', '=', person.id).execute()
    expect((await me(client)).status).toBe(401)
  })

  it('is not taken over by a forged cookie', async () => {
    const { status } = await new Client().send('GET', '/api/readings', undefined, { cookie: 'rimwright-session=Fe26.2**forged' })
    expect(status).toBe(401)
  })

  it('is refused for a write from another site', async () => {
    const client = await signIn(await createUser('customer'))
    const { status } = await client.send('POST', '/api/auth/sign-out-everywhere', undefined, { origin: 'https://elsewhere.test' })
    expect(status).toBe(403)
    expect((await me(client)).status).toBe(200)
  })

  it('changes its password and stays, while other places are signed out', async () => {
    const person = await createUser('customer')
    const [here, there] = [await signIn(person), await signIn(person)]
    const wrong = await here.post<{ data: { issues: unknown } }>('/api/auth/change-password', { current: 'not this one', password: NEW_PASSWORD })
    expect(wrong.status).toBe(401)
    expect(wrong.body.data.issues).toEqual([{ path: 'current', message: 'This is not your present password.' }])
    expect((await me(there)).status).toBe(200)
    expect((await here.post('/api/auth/change-password', { current: PASSWORD, password: NEW_PASSWORD })).status).toBe(200)
    expect([(await me(here)).status, (await me(there)).status]).toEqual([200, 401])
    await signIn(person, NEW_PASSWORD)
  })
})

describe('guessing a password', () => {
  it('is slowed after ten wrong tries from one place, also for the right password, and nowhere else', async () => {
    const person = await createUser('customer')
    const other = await createUser('customer')
    const from = (place: string, password: string, email = person.email) =>
      new Client().send<{ message: string }>('POST', '/api/auth/sign-in', { email, password }, { 'x-forwarded-for': place })
    const tries = await Promise.all(Array.from({ length: 14 }, () => from('203.0.113.7', 'a wrong password')))
    expect(tries.filter(({ status }) => status === 401)).toHaveLength(10)
    expect(tries.filter(({ status }) => status === 429)).toHaveLength(4)
    const right = await from('203.0.113.7', PASSWORD)
    expect(right.status).toBe(429)
    expect(right.body.message).toBe('Too many wrong tries. Wait a quarter of an hour, or ask for a new password.')
    expect((await from('203.0.113.8', PASSWORD)).status).toBe(200)
    expect((await from('203.0.113.7', PASSWORD, other.email)).status).toBe(200)
  })

  it('forgets wrong tries once the right password came', async () => {
    const person = await createUser('customer')
    const attempt = (password: string) => new Client().send('POST', '/api/auth/sign-in', { email: person.email, password }, { 'x-forwarded-for': '203.0.113.9' })
    for (let round = 0; round < 2; round++) {
      for (let n = 0; n < 9; n++) expect((await attempt('a wrong password')).status).toBe(401)
      expect((await attempt(PASSWORD)).status).toBe(200)
    }
  })

  it('says the same of a wrong password, an unknown address and a closed account', async () => {
    const person = await createUser('customer')
    const closed = await createUser('customer')
    await database().updateTable('users').set({ deactivated_at: new Date() }).where('id', '=', closed.id).execute()
    const answer = async (email: string, password: string) => (await new Client().send('POST', '/api/auth/sign-in', { email, password }, { 'x-forwarded-for': '203.0.113.10' })).body
    const wrong = await answer(person.email, 'a wrong password')
    expect(wrong).toMatchObject({ statusCode: 401 })
    expect(await answer(newAddress(), 'a wrong password')).toEqual(wrong)
    expect(await answer(closed.email, PASSWORD)).toEqual(wrong)
  })
})
