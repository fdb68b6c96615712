import { beforeAll, describe, expect, it } from 'vitest'
import type { FilmView, InstrumentHistoryView, InstrumentsPage, InstrumentView } from '../../shared/schemas/instrument'
import { clearFilm, createInstrument, fixtureBody } from '../support/bench'
import { Client, database, signInAs } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>
interface Refused { statusCode: number, message: string, data?: { issues: { path: string, message: string }[] } }

let owner: Signed
let maker: Signed
let staff: Signed
let player: Signed
let other: Signed

beforeAll(async () => {
  [owner, maker, staff, player, other] = await Promise.all([signInAs('owner'), signInAs('maker'), signInAs('staff'), signInAs('customer'), signInAs('customer')])
})

const count = async () => (await database().selectFrom('instruments').select(eb => eb.fn.countAll<number>().as('n')).executeTakeFirstOrThrow()).n

describe('registering an instrument', () => {
  it('gives it back whole, with a number and the ids of its heads', async () => {
    const { status, body } = await maker.post<InstrumentView>('/api/instruments', fixtureBody)
    expect(status).toBe(201)
    expect(body).toMatchObject({ name: '13 in proof head', construction: 'fixture', diameterMm: 330.2, rodCount: 8, threadPitchMm: 1.058, customerId: null, lastReading: null })
    expect(body.code).toMatch(/^TA-\d{4,}$/)
    expect(body.heads).toEqual([expect.objectContaining({ side: 'batter', film: clearFilm, arealDensityKgM2: 0.3475, learned: null })])
    expect((await maker.get<InstrumentView>(`/api/instruments/${body.id}`)).body).toEqual(body)
  })

  it('reckons the areal density from plies, thickness and density where none is given', async () => {
    const drum = await createInstrument(maker, { heads: [{ side: 'batter', film: { ...clearFilm, plies: 2 } }] })
    expect(drum.heads[0]!.arealDensityKgM2).toBeCloseTo(2 * 250e-6 * 1390, 12) // a product of three doubles
  })

  it('takes the common rod thread where none is named', async () => {
    const { threadPitchMm: _, ...body } = fixtureBody
    const { body: drum } = await maker.post<InstrumentView>('/api/instruments', body)
    // ASME B1.1: 12-24 UNC advances 1/24 in = 1.058 mm a turn.
    expect(drum.threadPitchMm).toBe(1.058)
  })

  it.each([
    ['a negative diameter', { diameterMm: -330 }, 'diameterMm'],
    ['a rod count of 0', { rodCount: 0 }, 'rodCount'],
    ['a kettle without its bowl volume', { construction: 'kettle' }, 'bowlVolumeL'],
    ['an open shell without a depth', { construction: 'open', depthMm: 0 }, 'depthMm'],
    ['a double-headed drum without its resonant head', { construction: 'double-headed', depthMm: 200 }, 'heads'],
    ['a film that the catalogue lacks', { heads: [{ side: 'batter', filmId: 'no-such-film', film: clearFilm }] }, 'heads.0.filmId'],
    ['an owner who is no customer', { customerId: '00000000-0000-4000-8000-000000000000' }, 'customerId'],
  ])('refuses %s and stores nothing', async (_, changes, path) => {
    const before = await count()
    const { status, body } = await maker.post<Refused>('/api/instruments', { ...fixtureBody, ...changes })
    expect(status).toBe(400)
    expect(body.data?.issues.map(issue => issue.path)).toContain(path)
    expect(await count()).toBe(before)
  })

  it('makes a customer\'s instrument the customer\'s own, whoever is named', async () => {
    const drum = await createInstrument(player, { customerId: other.person.id })
    expect(drum).toMatchObject({ customerId: player.person.id, customerName: player.person.name })
  })

  it('lets owner and maker register for a customer, and keeps staff from registering', async () => {
    expect((await createInstrument(owner, { customerId: player.person.id })).customerId).toBe(player.person.id)
    expect((await staff.post('/api/instruments', fixtureBody)).status).toBe(403)
    expect((await new Client().post('/api/instruments', fixtureBody)).status).toBe(401)
  })

  it('writes down who did it', async () => {
    const drum = await createInstrument(maker)
    const entry = await database().selectFrom('audit_events').selectAll().where('subject_id', '=', drum.id).executeTakeFirstOrThrow()
    expect(entry).toMatchObject({ actor_id: maker.person.id, action: 'instrument-created' })
  })
})

describe('whose instruments are seen', () => {
  it('hides another customer\'s instrument as if it did not exist', async () => {
    const drum = await createInstrument(player)
    for (const path of ['', '/history']) {
      expect((await other.get(`/api/instruments/${drum.id}${path}`)).status).toBe(404)
      expect((await staff.get(`/api/instruments/${drum.id}${path}`)).status).toBe(200)
    }
    expect((await other.patch(`/api/instruments/${drum.id}`, { name: 'mine now' })).status).toBe(404)
    expect((await other.post(`/api/instruments/${drum.id}/duplicate`)).status).toBe(404)
    expect((await other.patch(`/api/heads/${drum.headId}`, { film: clearFilm })).status).toBe(404)
    expect((await player.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.name).toBe(drum.name)
  })

  it('lists the own ones to a customer, and counts no others', async () => {
    const fresh = await signInAs('customer')
    await createInstrument(player)
    const drum = await createInstrument(fresh)
    const { body } = await fresh.get<InstrumentsPage>('/api/instruments')
    expect(body.items.map(item => item.id)).toEqual([drum.id])
    expect(body).toMatchObject({ total: 1, next: null })
  })

  it('finds by number, by name and by owner, with % as a letter', async () => {
    const word = `Q${Date.now().toString(36)}`
    const drum = await createInstrument(maker, { name: `100% ${word} drum`, customerId: player.person.id })
    await createInstrument(maker, { name: `100 ${word} drum` })
    const found = async (q: string) => (await maker.get<InstrumentsPage>(`/api/instruments?q=${encodeURIComponent(q)}`)).body.items.map(item => item.id)
    expect(await found(`0% ${word.toLowerCase()}`)).toEqual([drum.id])
    expect(await found(drum.code)).toEqual([drum.id])
    expect(await found(player.person.name)).toContain(drum.id)
  })

  it('pages through all of them once, newest first', async () => {
    const fresh = await signInAs('customer')
    const made: string[] = []
    for (let i = 0; i < 5; i++) made.push((await createInstrument(fresh, { name: `drum ${i}` })).id)
    const seen: string[] = []
    let next: string | null = ''
    while (next !== null) {
      const { body }: { body: InstrumentsPage } = await fresh.get<InstrumentsPage>(`/api/instruments?limit=2${next && `&cursor=${next}`}`)
      expect(body.total).toBe(5)
      seen.push(...body.items.map(item => item.id))
      next = body.next
    }
    expect(seen).toEqual(made.reverse())
  })

  it('searches for a text with a NUL in it, which PostgreSQL refuses in a parameter', async () => {
    expect((await maker.get('/api/instruments?q=%00')).status).toBe(200)
  })

  it('refuses a cursor that it did not give out, and a limit past 200', async () => {
    expect((await maker.get('/api/instruments?cursor=abc')).status).toBe(400)
    expect((await maker.get('/api/instruments?limit=201')).status).toBe(400)
  })
})

describe('changing an instrument', () => {
  it('changes what is named and nothing else', async () => {
    const drum = await createInstrument(maker, { threadPitchMm: 0.9 })
    const { status, body } = await maker.patch<InstrumentView>(`/api/instruments/${drum.id}`, { name: 'Renamed', note: 'new hoop' })
    expect(status).toBe(200)
    const { headId: _, ...before } = drum
    expect(body).toEqual({ ...before, name: 'Renamed', note: 'new hoop' })
  })

  it('keeps a customer from giving an instrument away', async () => {
    const drum = await createInstrument(player)
    await player.patch(`/api/instruments/${drum.id}`, { customerId: other.person.id })
    expect((await player.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.customerId).toBe(player.person.id)
  })

  it('refuses a change that leaves the instrument without what its construction needs', async () => {
    const drum = await createInstrument(maker, { construction: 'kettle', bowlVolumeL: 90 })
    const { status, body } = await maker.patch<Refused>(`/api/instruments/${drum.id}`, { bowlVolumeL: null })
    expect(status).toBe(400)
    expect(body.data?.issues[0]?.path).toBe('bowlVolumeL')
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.bowlVolumeL).toBe(90)
  })

  it('forgets what was learned of a head\'s rods when its film changes, or its thread', async () => {
    const learned = { kappa: 0.7, kappa_variance: 0.001, kappa_passes: 3 }
    const drum = await createInstrument(maker)
    const teach = () => database().updateTable('heads').set(learned).where('id', '=', drum.headId).execute()
    await teach()
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.heads[0]!.learned).toEqual({ kappa: 0.7, passes: 3 })
    const { status, body } = await maker.patch<InstrumentView>(`/api/heads/${drum.headId}`, { film: { ...clearFilm, thicknessUm: 188 } })
    expect(status).toBe(200)
    expect(body.heads[0]).toMatchObject({ learned: null, film: { thicknessUm: 188 } })
    await teach()
    await maker.patch(`/api/instruments/${drum.id}`, { name: 'Same rods' })
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.heads[0]!.learned).not.toBeNull()
    await maker.patch(`/api/instruments/${drum.id}`, { threadPitchMm: 0.8 })
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.heads[0]!.learned).toBeNull()
  })

  it('copies an instrument under a number of its own, without what was learned', async () => {
    const drum = await createInstrument(maker, { customerId: player.person.id })
    await database().updateTable('heads').set({ kappa: 0.7, kappa_variance: 0.001, kappa_passes: 3 }).where('id', '=', drum.headId).execute()
    const { status, body } = await maker.post<InstrumentView>(`/api/instruments/${drum.id}/duplicate`)
    expect(status).toBe(201)
    expect(body).toMatchObject({ name: `${drum.name} (copy)`, customerId: player.person.id, diameterMm: drum.diameterMm })
    expect(body.id).not.toBe(drum.id)
    expect(body.code).not.toBe(drum.code)
    expect(body.heads[0]).toMatchObject({ learned: null, film: clearFilm })
  })

  it('starts with an empty history', async () => {
    const drum = await createInstrument(maker)
    expect((await maker.get<InstrumentHistoryView>(`/api/instruments/${drum.id}/history`)).body).toEqual({ readings: [], turns: [] })
  })
})

describe('the film catalogue', () => {
  it('is there without demo data, for anyone who designs a head', async () => {
    const { status, body } = await new Client().get<{ items: FilmView[] }>('/api/films')
    expect(status).toBe(200)
    expect(body.items.length).toBeGreaterThanOrEqual(8)
    for (const film of body.items) expect(film.arealDensityKgM2).toBeGreaterThanOrEqual(film.plies * film.thicknessUm * 1e-6 * film.densityKgM3 - 1e-12) // coating only adds; rounding of the product
  })
})
