import { randomUUID } from 'node:crypto'
import { beforeAll, describe, expect, it } from 'vitest'
import type { ReadingRowView, ReadingsPage } from '../../shared/schemas/reading'
import { arrangeDrum, arrangeReadings, type Drum } from '../support/history'
import { type Client, createUser, type Person, signIn, signInAs } from '../support/stack'

const tag = randomUUID().slice(0, 8)
let staff: Client & { person: Person }
let owner: Person, otherOwner: Person, maker: Person
let tom: Drum, kettle: Drum, own: Drum

beforeAll(async () => {
  staff = await signInAs('staff')
  owner = await createUser('customer', { name: `Ilse ${tag}` })
  otherOwner = await createUser('customer', { name: `Aksel ${tag}` })
  maker = await createUser('maker', { name: `Maren ${tag}` })
  tom = await arrangeDrum({ name: `Floor tom ${tag}`, customerId: owner.id })
  kettle = await arrangeDrum({ name: `Kettle ${tag} 100%`, construction: 'kettle', customerId: otherOwner.id })
  own = await arrangeDrum({ name: `Workshop drum ${tag}` })
  const day = (n: number) => new Date(Date.UTC(2026, 0, n, 12))
  await arrangeReadings(tom, Array.from({ length: 12 }, (_, n) => ({ takenAt: day(n + 1), tension: 2000 + 10 * n, hz: 100 + n, evenness: n % 3 ? null : n, by: maker })))
  await arrangeReadings(kettle, Array.from({ length: 5 }, (_, n) => ({ takenAt: day(n + 20), tension: 4000 + n, hz: 200 + n, doubtful: n === 0 })))
  // The same moment five times: only the id tells them apart.
  await arrangeReadings(own, Array.from({ length: 5 }, () => ({ takenAt: day(10), tension: 3000, hz: 150 })))
})

const list = async (query: Record<string, string | number>, client: Client = staff) => {
  const { status, body } = await client.get<ReadingsPage>(`/api/readings?${new URLSearchParams({ q: tag, ...Object.fromEntries(Object.entries(query).map(([key, value]) => [key, String(value)])) })}`)
  expect(status).toBe(200)
  return body
}

async function walk(query: Record<string, string | number>): Promise<ReadingRowView[]> {
  const items: ReadingRowView[] = []
  let cursor: string | null = null
  do {
    const page: ReadingsPage = await list({ ...query, ...(cursor && { cursor }) })
    expect(page.position).toBe(items.length + 1)
    items.push(...page.items)
    cursor = page.next
  } while (cursor)
  return items
}

describe('the instrument history table', () => {
  it('gives instrument, owner, head, tension, pitch, evenness, date and maker of each reading', async () => {
    const [row] = (await list({ sort: 'tension', limit: 1 })).items
    expect(row).toMatchObject({
      instrumentId: tom.id, instrumentCode: tom.code, instrumentName: tom.name, construction: 'open', ownerId: owner.id, ownerName: owner.name,
      headId: tom.headId, side: 'batter', strike: 'centre', tension: { nPerM: 2000, u95NPerM: 60 }, fundamentalHz: 100, evennessPercent: 0,
      takenAt: '2026-01-01T12:00:00.000Z', makerName: maker.name, doubtful: false, temperatureC: 20,
    })
  })

  it('counts what the filters leave and lists the newest first', async () => {
    const page = await list({ limit: 3 })
    expect(page.total).toBe(22)
    expect(page.items.map(item => item.takenAt.slice(0, 10))).toEqual(['2026-01-24', '2026-01-23', '2026-01-22'])
  })

  const sorts: [string, (row: ReadingRowView) => (string | number)[]][] = [
    ['takenAt', row => [row.takenAt]], ['tension', row => [row.tension.nPerM]], ['fundamental', row => [row.fundamentalHz]],
    ['instrument', row => [row.instrumentCode, row.takenAt]], ['owner', row => [row.ownerName ?? '', row.instrumentCode, row.takenAt]],
  ]
  for (const [sort, key] of sorts) {
    for (const direction of ['', '-']) {
      it(`walks every row once, in order, by cursor, sorted by ${direction}${sort}`, async () => {
        const rows = await walk({ sort: `${direction}${sort}`, limit: 4 })
        expect(new Set(rows.map(row => row.id)).size).toBe(22)
        const keys = rows.map(row => JSON.stringify(key(row)))
        const sorted = rows.toSorted((a, b) => compare(key(a), key(b)) * (direction ? -1 : 1)).map(row => JSON.stringify(key(row)))
        expect(keys).toEqual(sorted)
      })
    }
  }

  it('puts readings without evenness last in both directions', async () => {
    const up = (await walk({ sort: 'evenness', limit: 3 })).map(row => row.evennessPercent)
    const down = (await walk({ sort: '-evenness', limit: 3 })).map(row => row.evennessPercent)
    expect(up.slice(0, 5)).toEqual([0, 3, 6, 9, null])
    expect(down.slice(0, 5)).toEqual([9, 6, 3, 0, null])
    expect([up.length, down.length]).toEqual([22, 22])
  })

  it('goes back to the same page by its previous cursor', async () => {
    const first = await list({ limit: 5 })
    const second = await list({ limit: 5, cursor: first.next! })
    const back = await list({ limit: 5, cursor: second.previous! })
    expect(back.items).toEqual(first.items)
    expect(back).toMatchObject({ position: 1, previous: null })
    expect(second.position).toBe(6)
  })

  it('gives the same rows by page number as by cursor', async () => {
    const first = await list({ limit: 5 })
    const byCursor = await list({ limit: 5, cursor: first.next! })
    const byNumber = await list({ limit: 5, page: 2 })
    expect(byNumber.items).toEqual(byCursor.items)
    expect((await list({ limit: 5, page: 6 })).items).toEqual([])
  })

  it.each<[Record<string, string>, number]>([
    [{ construction: 'kettle' }, 5], [{ side: 'resonant' }, 0], [{ construction: 'kettle', side: 'resonant' }, 0], [{ doubtful: 'true' }, 1], [{ doubtful: 'false' }, 21],
    [{ from: '2026-01-10', to: '2026-01-10' }, 6], [{ from: '2026-01-24' }, 1], [{ to: '2026-01-01' }, 1],
    [{ minTension: '2010', maxTension: '2020' }, 2], [{ minHz: '200' }, 5], [{ maxHz: '100.5' }, 1],
  ])('filters by %o', async (filter, expected) => {
    const page = await list(filter)
    expect(page.items).toHaveLength(expected)
    expect(page.total).toBe(expected)
  })

  it('filters by owner, instrument, head and maker', async () => {
    expect((await list({ customerId: owner.id })).total).toBe(12)
    expect((await list({ instrumentId: kettle.id })).total).toBe(5)
    expect((await list({ headId: own.headId, sort: 'owner' })).items).toHaveLength(5)
    expect((await list({ takenBy: maker.id })).total).toBe(12)
  })

  it('finds each word in number, name or owner, in any case, and takes % and _ as letters', async () => {
    expect((await list({ q: `floor ILSE ${tag}` })).total).toBe(12)
    expect((await list({ q: `${kettle.code} ${tag}` })).total).toBe(5)
    expect((await list({ q: `100% ${tag}` })).total).toBe(5)
    expect((await list({ q: `1_0 ${tag}` })).total).toBe(0)
    expect((await list({ q: `ilse kettle ${tag}` })).total).toBe(0)
  })

  it('follows an owner who changes name', async () => {
    const renamed = await createUser('customer', { name: `Before ${tag}` })
    const drum = await arrangeDrum({ customerId: renamed.id })
    await arrangeReadings(drum, [{}])
    const { database } = await import('../support/stack')
    await database().updateTable('users').set({ name: `After ${tag}x` }).where('id', '=', renamed.id).execute()
    expect((await list({ q: `after ${tag}x` })).items).toMatchObject([{ ownerName: `After ${tag}x` }])
    expect((await list({ q: `before ${tag}` })).total).toBe(0)
    await database().updateTable('instruments').set({ customer_id: null }).where('id', '=', drum.id).execute()
    expect((await list({ q: `after ${tag}x` })).total).toBe(0)
  })

  it('shows a customer the readings of own instruments only, whatever is asked for', async () => {
    const client = await signIn(owner)
    expect((await list({}, client)).total).toBe(12)
    expect((await list({ customerId: otherOwner.id }, client)).items).toEqual([])
    expect((await list({ instrumentId: kettle.id }, client)).items).toEqual([])
  })

  it('does not let a customer go on with a cursor into rows of others', async () => {
    const client = await signIn(owner)
    const staffPage = await list({ limit: 1, sort: '-takenAt' })
    const page = await list({ sort: '-takenAt', cursor: staffPage.next! }, client)
    expect(page.items.every(row => row.instrumentId === tom.id)).toBe(true)
  })

  it.each([
    ['limit=201'], ['limit=0'], ['sort=password'], ['sort=--tension'], ['page=0'], ['from=yesterday'], ['minTension=much'], ['customerId=1'], ['cursor=abc'], ['construction=guitar'],
    [`cursor=${Buffer.from(JSON.stringify({ sort: 'tension', direction: 'next', key: ['1', randomUUID()], position: 1 })).toString('base64url')}`],
    [`cursor=${Buffer.from(JSON.stringify({ sort: '-takenAt', direction: 'next', key: ['x\'; drop table readings', randomUUID()], position: 1 })).toString('base64url')}`],
  ])('refuses %s with 400 and names the field', async (query) => {
    const { status, body } = await staff.get<{ message: string, data: { issues: { path: string }[] } }>(`/api/readings?${query}`)
    expect(status).toBe(400)
    expect(body.data.issues[0]?.path).toBe(query.split('=')[0])
  })
})

function compare(a: (string | number)[], b: (string | number)[]): number {
  for (let index = 0; index < a.length; index++) {
    if (a[index]! < b[index]!) return -1
    if (a[index]! > b[index]!) return 1
  }
  return 0
}
