import { randomUUID } from 'node:crypto'
import { beforeAll, describe, expect, it } from 'vitest'
import type { BothHeadsLine, BothHeadsView } from '../../shared/schemas/bothHeads'
import type { InstrumentView } from '../../shared/schemas/instrument'
import type { ReadingView } from '../../shared/schemas/reading'
import { clearFilm, createInstrument, uploadRecording } from '../support/bench'
import { type SimTap, simulateTap, writeWav16 } from '../support/drum'
import { database, signInAs } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>
let player: Signed
let staff: Signed
let other: Signed
let drum: InstrumentView
let taps: Record<'batter' | 'resonant', ReadingView>

const TRUTH = { batter: 2600, resonant: 1900 }
const sheet = (tensionNPerM: number, plyThicknessM: number): SimTap['drum']['batter'] =>
  ({ tensionNPerM, plies: 1, plyThicknessM, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: 1390 * plyThicknessM })
const FILMS = { batter: 250e-6, resonant: 188e-6 }

/** An edge tap on one head of a 14 in drum, the other head free. */
function tapOn(side: 'batter' | 'resonant'): Uint8Array<ArrayBuffer> {
  const far = side === 'batter' ? 'resonant' : 'batter'
  const { samples, sampleRateHz } = simulateTap({
    // The simulation strikes its batter; turned over, the drum is the same.
    drum: { construction: 'double-headed', radiusM: 0.1778, depthM: 0.3, batter: sheet(TRUTH[side], FILMS[side]), resonant: sheet(TRUTH[far], FILMS[far]) },
    strike: { radiusRatio: 0.75, angleRad: 0.3 },
    microphone: { radiusRatio: 0.5, angleRad: 0.6, heightM: 0.1 },
    recording: { seed: side === 'batter' ? 21 : 22, snrDb: 35, ringS: 1.5, sampleRateHz: 24_000 },
  })
  return new Uint8Array(writeWav16(samples, sampleRateHz))
}

// Made before anybody speaks to the server: seconds without a word and it closes the connection.
const sounds = { batter: tapOn('batter'), resonant: tapOn('resonant') }

beforeAll(async () => {
  [player, staff, other] = await Promise.all([signInAs('customer'), signInAs('staff'), signInAs('customer')])
  drum = await createInstrument(player, {
    name: '14 in two-headed tom', construction: 'double-headed', diameterMm: 355.6, depthMm: 300,
    heads: [{ side: 'batter', film: clearFilm }, { side: 'resonant', film: { ...clearFilm, thicknessUm: 188 } }],
  })
  const read = async (side: 'batter' | 'resonant') => (await uploadRecording(player, drum.heads.find(head => head.side === side)!.id, sounds[side])).body.reading!
  taps = { batter: await read('batter'), resonant: await read('resonant') }
})

const together = (client: Signed, batterReadingId: string, resonantReadingId: string) =>
  client.post<BothHeadsView & { message: string, data?: { issues: { path: string }[] } }>('/api/both-heads', { batterReadingId, resonantReadingId })
const stored = async () => (await database().selectFrom('joint_readings').select('id').where('instrument_id', '=', drum.id).execute()).length

describe('both heads of a drum', () => {
  it('are each read from a tap on them, which also says something of the other', () => {
    expect(taps.batter.twoHeads).toMatchObject({ struck: 'batter' })
    expect(taps.resonant.twoHeads).toMatchObject({ struck: 'resonant' })
    // 3 %: twice what one head may be off at the 90th percentile, for a drum whose second head is unknown.
    for (const side of ['batter', 'resonant'] as const) expect(Math.abs(taps[side].tension.nPerM / TRUTH[side] - 1)).toBeLessThan(0.03)
  })

  it('are read together from a tap on each: two tensions, and the pair of lowest tones explained', async () => {
    const { status, body } = await together(player, taps.batter.id, taps.resonant.id)
    expect(status).toBe(201)
    // 2 %: the stated 95 % of such a reading.
    for (const side of ['batter', 'resonant'] as const) expect(Math.abs(body[side].nPerM / TRUTH[side] - 1)).toBeLessThan(0.02)
    expect(body.pair.inPhase.predictedHz).toBeLessThan(body.pair.against.predictedHz)
    expect(body).toMatchObject({ instrument: { id: drum.id, code: drum.code }, byName: player.person.name, outdated: false, taps: { batter: { readingId: taps.batter.id }, resonant: { readingId: taps.resonant.id } } })
    expect((await staff.get<BothHeadsView>(`/api/both-heads/${body.id}`)).body).toEqual(body)
    expect((await other.get(`/api/both-heads/${body.id}`)).status).toBe(404)
    expect((await player.get<{ items: BothHeadsLine[] }>(`/api/instruments/${drum.id}/both-heads`)).body.items).toEqual([expect.objectContaining({ id: body.id })])
    expect((await other.get(`/api/instruments/${drum.id}/both-heads`)).status).toBe(404)
    expect((await player.get<ReadingView>(`/api/readings/${taps.resonant.id}`)).body.togetherId).toBe(body.id)
  })

  it('are refused in words where the two readings do not make one drum, and nothing is stored', async () => {
    const before = await stored()
    expect((await together(player, taps.resonant.id, taps.batter.id)).body.data?.issues[0]?.path).toBe('batterReadingId')
    expect((await together(player, taps.batter.id, taps.batter.id)).body.data?.issues[0]?.path).toBe('resonantReadingId')
    expect((await together(player, taps.batter.id, randomUUID())).status).toBe(404)
    expect((await together(other, taps.batter.id, taps.resonant.id)).status).toBe(404)
    expect((await together(staff, taps.batter.id, taps.resonant.id)).status).toBe(403)
    await database().updateTable('readings').set({ taken_at: new Date(Date.now() - 3 * 24 * 3600_000) }).where('id', '=', taps.resonant.id).execute()
    const { status, body } = await together(player, taps.batter.id, taps.resonant.id)
    expect(status).toBe(409)
    expect(body.message).toContain('more than a day apart')
    expect(await stored()).toBe(before)
  })
})
