import { randomUUID } from 'node:crypto'
import { beforeAll, describe, expect, it } from 'vitest'
import { arrangeDrum, arrangeReadings, type Drum } from '../support/history'
import { type Client, createUser, database, type Person, signInAs } from '../support/stack'

let ilse: Person
let drum: Drum, readingId: string, sheetId: string, specId: string, orderId: string
let stranger: Client & { person: Person }

async function arrangeOrder(customer: Person): Promise<{ specId: string, orderId: string }> {
  const db = database()
  const film = await db.selectFrom('films').select('id').limit(1).executeTakeFirstOrThrow()
  const prices = await db.selectFrom('price_lists').select('id').limit(1).executeTakeFirst()
    ?? await db.insertInto('price_lists').values({ valid_from: new Date(0), currency: 'eur', prices: '{}', created_by: null }).returning('id').executeTakeFirstOrThrow()
  const spec = await db.insertInto('head_specs').values({
    customer_id: customer.id, instrument_id: null, diameter_mm: 355.6, film_id: film.id, target: JSON.stringify({ kind: 'pitch', hz: 147 }), note: null, reachable: true, message: 'It can be reached.',
    predicted: JSON.stringify({ tensionNPerM: 3000, fundamentalHz: 147, shareOfYield: 0.1, modes: [] }), price: JSON.stringify({ totalMinor: 1000, currency: 'eur', lines: [] }), price_list_id: prices.id,
  }).returning('id').executeTakeFirstOrThrow()
  const order = await db.insertInto('orders').values({
    customer_id: customer.id, status: 'paid', currency: 'eur', total_minor: 1000, lines: '[]', checkout_session_id: null, checkout_url: null, due_on: null,
    shipping_address: JSON.stringify({ name: 'I', line1: '1', city: 'C', postalCode: '1', country: 'DE' }),
  }).returning('id').executeTakeFirstOrThrow()
  await db.insertInto('order_heads').values({ order_id: order.id, head_spec_id: spec.id, position: 0 }).execute()
  return { specId: spec.id, orderId: order.id }
}

beforeAll(async () => {
  ilse = await createUser('customer', { name: 'Ilse' })
  stranger = await signInAs('customer')
  drum = await arrangeDrum({ customerId: ilse.id })
  readingId = (await arrangeReadings(drum, [{}]))[0]!
  sheetId = (await database().insertInto('turn_sheets').values({
    head_id: drum.headId, instrument_id: drum.id, reading_id: readingId, target: JSON.stringify({ kind: 'even' }), sheet: JSON.stringify({ rods: [] }),
    applied: null, applied_at: null, applied_by: null, next_reading_id: null, created_by: null,
  }).returning('id').executeTakeFirstOrThrow()).id
  ;({ specId, orderId } = await arrangeOrder(ilse))
})

/** Everything of Ilse's that a write could touch. */
const belongings = async () => JSON.stringify(await Promise.all([
  database().selectFrom('instruments').selectAll().where('customer_id', '=', ilse.id).execute(),
  database().selectFrom('heads').selectAll().where('instrument_id', '=', drum.id).execute(),
  database().selectFrom('recordings').selectAll().where('instrument_id', '=', drum.id).execute(),
  database().selectFrom('turn_sheets').selectAll().where('instrument_id', '=', drum.id).execute(),
  database().selectFrom('orders').selectAll().where('customer_id', '=', ilse.id).execute(),
]))

describe('what belongs to another customer', () => {
  it.each<[string, () => string]>([
    ['an instrument', () => `/api/instruments/${drum.id}`],
    ['its tuning history', () => `/api/instruments/${drum.id}/history`],
    ['a reading', () => `/api/readings/${readingId}`],
    ['a recording', () => `/api/recordings/${drum.recordingId}/audio`],
    ['a turn sheet', () => `/api/turn-sheets/${sheetId}`],
    ['a head spec', () => `/api/head-specs/${specId}`],
    ['an order', () => `/api/orders/${orderId}`],
  ])('%s looks exactly like what does not exist', async (_what, path) => {
    const theirs = await stranger.get<{ message: string }>(path())
    const none = await stranger.get<{ message: string }>(path().replace(/[0-9a-f-]{36}/, randomUUID()))
    expect(theirs.status).toBe(404)
    expect(theirs.body).toEqual(none.body)
  })

  it.each<[string, string, () => string, unknown]>([
    ['renaming an instrument', 'PATCH', () => `/api/instruments/${drum.id}`, { name: 'Mine now' }],
    ['copying an instrument', 'POST', () => `/api/instruments/${drum.id}/duplicate`, {}],
    ['turning its rods', 'POST', () => `/api/turn-sheets/${sheetId}/applied`, { rods: [{ rod: 1, turns: 1 }] }],
    ['cancelling an order', 'POST', () => `/api/orders/${orderId}/cancel`, {}],
    ['settling an order', 'POST', () => `/api/orders/${orderId}/settle`, {}],
    ['a new film for a head', 'PATCH', () => `/api/heads/${drum.headId}`, { film: { material: 'pet', plies: 1, thicknessUm: 250, densityKgM3: 1390, modulusGPa: 4.5, poisson: 0.38, yieldMPa: 100 } }],
  ])('%s is refused with 404 and changes nothing', async (_what, method, path, body) => {
    const before = await belongings()
    expect((await stranger.send(method, path(), body)).status).toBe(404)
    expect(await belongings()).toBe(before)
  })

  it('takes no recording of a stranger', async () => {
    const before = await belongings()
    const form = new FormData()
    form.set('strike', 'centre')
    form.set('file', new Blob([new Uint8Array(100)], { type: 'audio/wav' }), 'tap.wav')
    expect((await stranger.send('POST', `/api/heads/${drum.headId}/recordings`, form)).status).toBe(404)
    expect(await belongings()).toBe(before)
  })

  it('is in none of the lists of a stranger', async () => {
    for (const list of ['instruments', 'readings', 'orders']) {
      expect((await stranger.get<{ items: unknown[] }>(`/api/${list}`)).body.items).toEqual([])
    }
  })

  it('cannot be ordered: not with the spec of somebody else', async () => {
    const address = { name: 'S', line1: '1', city: 'C', postalCode: '1', country: 'DE' }
    expect((await stranger.post('/api/orders', { headSpecIds: [specId], shippingAddress: address })).status).toBe(404)
    expect(await database().selectFrom('orders').select('id').where('customer_id', '=', stranger.person.id).execute()).toEqual([])
  })
})

describe('a recording that its customer keeps for the maker', () => {
  it('is not heard by staff', async () => {
    const quiet = await arrangeDrum({ customerId: ilse.id })
    await database().updateTable('recordings').set({ private_to_maker: true }).where('id', '=', quiet.recordingId).execute()
    const staff = await signInAs('staff')
    const answer = await staff.get(`/api/recordings/${quiet.recordingId}/audio`)
    expect([403, 404]).toContain(answer.status)
    expect(answer.headers.get('content-type')).toMatch(/json/)
  })
})

describe('an instrument of a customer', () => {
  it('is not given away by its customer to an account of choice', async () => {
    const client = await signInAs('customer')
    const mine = await arrangeDrum({ customerId: client.person.id })
    await client.patch(`/api/instruments/${mine.id}`, { customerId: ilse.id })
    const row = await database().selectFrom('instruments').select('customer_id').where('id', '=', mine.id).executeTakeFirstOrThrow()
    expect(row.customer_id).toBe(client.person.id)
  })
})
