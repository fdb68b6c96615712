import { beforeAll, describe, expect, it } from 'vitest'
import type { ReadingView } from '../../shared/schemas/reading'
import { arrangeReading, createInstrument } from '../support/bench'
import { Client, signInAs } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>
let maker: Signed
let staff: Signed
let player: Signed
let other: Signed

beforeAll(async () => {
  [maker, staff, player, other] = await Promise.all([signInAs('maker'), signInAs('staff'), signInAs('customer'), signInAs('customer')])
})

describe('a reading', () => {
  it('is seen by the workshop and by the instrument\'s owner, by nobody else', async () => {
    const drum = await createInstrument(player)
    const id = await arrangeReading(drum.headId, drum.id, 2500)
    for (const client of [maker, staff, player]) expect((await client.get(`/api/readings/${id}`)).status).toBe(200)
    expect((await other.get(`/api/readings/${id}`)).status).toBe(404)
    expect((await new Client().get(`/api/readings/${id}`)).status).toBe(401)
  })

  it('carries tension, uncertainty, rim, budget and sound, with its instrument', async () => {
    const drum = await createInstrument(player)
    const id = await arrangeReading(drum.headId, drum.id, 2500, { deviationsPercent: [4, 0, -4, 0, 4, 0, -4, 0] })
    const { body } = await player.get<ReadingView>(`/api/readings/${id}`)
    expect(body).toMatchObject({
      id, headId: drum.headId, instrumentId: drum.id, strike: 'edge', doubtful: false, runnerUp: null, budget: [], unexplained: [], warnings: [],
      tension: { nPerM: 2500, u95NPerM: 50, repeatabilityU95NPerM: 10 },
      rim: { evennessPercent: 4 },
      sound: { sampleRateHz: 48000, spectrum: null },
      instrument: { id: drum.id, code: drum.code, name: drum.name, construction: 'fixture', diameterMm: 330.2, rodCount: 8 },
      head: { id: drum.headId, side: 'batter' },
    })
    expect(new Date(body.takenAt).toISOString()).toBe(body.takenAt)
  })

  it('says plainly that an address is no id, and that an id is unknown', async () => {
    expect((await maker.get('/api/readings/latest')).status).toBe(400)
    expect((await maker.get('/api/readings/00000000-0000-4000-8000-000000000000')).status).toBe(404)
  })
})
