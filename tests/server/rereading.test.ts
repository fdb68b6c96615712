import { randomUUID } from 'node:crypto'
import { rm } from 'node:fs/promises'
import { join } from 'node:path'
import { beforeAll, describe, expect, it } from 'vitest'
import type { InstrumentHistoryView, InstrumentView } from '../../shared/schemas/instrument'
import type { ReadingsPage, ReadingView } from '../../shared/schemas/reading'
import type { RereadingView } from '../../shared/schemas/rereading'
import { clearFilm, createInstrument, fixtureTap, kept, soundWav, uploadRecording } from '../support/bench'
import { type Answer, database, eventually, signInAs, stack } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>
let maker: Signed
let player: Signed
let other: Signed
const tap = fixtureTap(3000)

beforeAll(async () => {
  [maker, player, other] = await Promise.all([signInAs('maker'), signInAs('customer'), signInAs('customer')])
})

type Again = Answer<{ reading: ReadingView, changed: boolean, message?: string }>
const again = (client: Signed, recordingId: string): Promise<Again> => client.post(`/api/recordings/${recordingId}/read-again`)
const historyOf = async (drumId: string) => (await maker.get<InstrumentHistoryView>(`/api/instruments/${drumId}/history`)).body.readings

async function readTap(owner: Signed = player) {
  const drum = await createInstrument(owner)
  const { body } = await uploadRecording(owner, drum.headId, tap)
  return { drum, reading: body.reading!, recordingId: body.recording.id! }
}

/** As if an earlier version had read it, and somewhat otherwise. */
async function age(recordingId: string, changes: { tension?: number } = {}): Promise<void> {
  await database().updateTable('recordings').set({ analysis_version: '0.9.0' }).where('id', '=', recordingId).execute()
  await database().updateTable('readings').set({ analysis_version: '0.9.0', ...(changes.tension && { tension_n_per_m: changes.tension }) }).where('recording_id', '=', recordingId).execute()
}

describe('one recording read again', () => {
  it('gives the newest reading and stores nothing where nothing has changed since', async () => {
    const { drum, reading, recordingId } = await readTap()
    const before = await kept(drum.headId)
    const { status, body } = await again(player, recordingId)
    expect(status).toBe(200)
    expect(body).toMatchObject({ changed: false, reading: { id: reading.id, newest: true, versions: [], outdated: null } })
    expect(await kept(drum.headId)).toEqual(before)
  })

  it('keeps the earlier reading beside the new one, each knowing the other; lists and charts show the new one only', async () => {
    const { drum, reading, recordingId } = await readTap()
    await age(recordingId, { tension: 2222 })
    expect((await player.get<ReadingView>(`/api/readings/${reading.id}`)).body.outdated).toBe('version')
    const { body } = await again(player, recordingId)
    expect(body).toMatchObject({ changed: true, reading: { newest: true, outdated: null, takenAt: reading.takenAt, versions: [{ id: reading.id, analysisVersion: '0.9.0', tension: { nPerM: 2222 }, newest: false }] } })
    expect(body.reading.id).not.toBe(reading.id)
    const earlier = (await player.get<ReadingView>(`/api/readings/${reading.id}`)).body
    expect(earlier).toMatchObject({ newest: false, outdated: null, versions: [{ id: body.reading.id, newest: true }] })
    expect((await historyOf(drum.id)).map(point => point.id)).toEqual([body.reading.id])
    expect((await maker.get<ReadingsPage>(`/api/readings?instrumentId=${drum.id}`)).body).toMatchObject({ total: 1, items: [{ id: body.reading.id }] })
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.lastReading?.id).toBe(body.reading.id)
    // Twice gives no third.
    expect((await again(player, recordingId)).body.changed).toBe(false)
  })

  it('hands the closing of a turn sheet on, and makes no sheet from the earlier reading', async () => {
    const { reading, recordingId, drum } = await readTap(maker)
    const { body: sheet } = await maker.post<{ id: string, rods: unknown[] }>('/api/turn-sheets', { readingId: reading.id, target: { kind: 'tension', nPerM: 3100 } })
    await maker.post(`/api/turn-sheets/${sheet.id}/applied`, { rods: sheet.rods })
    const { body: next } = await uploadRecording(maker, drum.headId, fixtureTap(3100))
    for (const id of [recordingId, next.recording.id!]) await age(id)
    const { body } = await again(maker, next.recording.id!)
    expect((await maker.get<{ nextReadingId: string }>(`/api/turn-sheets/${sheet.id}`)).body.nextReadingId).toBe(body.reading.id)
    const { status, body: refused } = await maker.post<{ message: string }>('/api/turn-sheets', { readingId: next.reading!.id, target: { kind: 'tension', nPerM: 3200 } })
    expect(status).toBe(409)
    expect(refused.message).toContain('newest reading')
  })

  it('uses figures of the same film that are better known, and leaves the tuning of an older film alone', async () => {
    const { drum, reading, recordingId } = await readTap()
    // 4 % more mass makes the same pitches 4 % more tension, a little less for the air's share: that is what a better figure is for.
    await player.patch(`/api/heads/${drum.headId}`, { film: clearFilm, arealDensityKgM2: 0.3614, sameFilm: true })
    expect((await player.get<ReadingView>(`/api/readings/${reading.id}`)).body.outdated).toBe('figures')
    const { body } = await again(player, recordingId)
    const rise = body.reading.tension.nPerM / reading.tension.nPerM - 1
    expect(rise).toBeGreaterThan(0.025) // the air's mass, up to a third of the film's here, does not grow with it
    expect(rise).toBeLessThan(0.045) // 4 % and what the edge's bend makes of it
    // Another film since: the recording stays read with the film that was on, so there is nothing new to read.
    await player.patch(`/api/heads/${drum.headId}`, { film: { ...clearFilm, thicknessUm: 500 } })
    expect((await again(player, recordingId)).body.changed).toBe(false)
    await age(recordingId)
    const { body: later } = await again(player, recordingId)
    expect(later.changed).toBe(true)
    // 0.1 %: the same sound and the same film once more, to rounding.
    expect(later.reading.tension.nPerM / body.reading.tension.nPerM).toBeCloseTo(1, 3)
  })

  it('says so where the film of that time is not known, and keeps the reading', async () => {
    const { drum, reading, recordingId } = await readTap()
    await player.patch(`/api/heads/${drum.headId}`, { film: { ...clearFilm, thicknessUm: 500 } })
    await database().deleteFrom('earlier_films').where('head_id', '=', drum.headId).execute()
    await age(recordingId)
    const { status, body } = await again(player, recordingId)
    expect(status).toBe(409)
    expect(body.message).toContain('were not kept')
    expect((await historyOf(drum.id)).map(point => point.id)).toEqual([reading.id])
  })

  it('keeps the earlier reading where the sound is refused now, with a note on it', async () => {
    const { drum, reading, recordingId } = await readTap()
    const { file_path: path } = await database().selectFrom('recordings').select('file_path').where('id', '=', recordingId).executeTakeFirstOrThrow()
    const { writeFile } = await import('node:fs/promises')
    await writeFile(join(stack.dataDir, 'recordings', path), soundWav(1, () => 0))
    await age(recordingId)
    const { status, body } = await again(player, recordingId)
    expect(status).toBe(422)
    expect(body.message).toContain('earlier reading stays')
    const { body: view } = await player.get<ReadingView>(`/api/readings/${reading.id}`)
    expect(view).toMatchObject({ newest: true, rereadRefusal: { code: 'silent' } })
    expect((await kept(drum.headId)).readings).toBe(1)
  })

  it('is not for strangers', async () => {
    const { drum, recordingId } = await readTap()
    await age(recordingId)
    expect((await again(other, recordingId)).status).toBe(404)
    expect((await again(maker, randomUUID())).status).toBe(404)
    expect((await kept(drum.headId)).readings).toBe(1)
  })
})

describe('all old recordings read again', () => {
  const state = async () => (await maker.get<RereadingView>('/api/rereading')).body
  const begin = async (version?: string) => maker.post<RereadingView>('/api/rereading', { version: version ?? (await state()).version })
  const ended = () => eventually(async () => {
    const { run } = await state()
    return run && run.state !== 'running' ? run : undefined
  }, 'the end of the run', 60_000)

  it('reads each once in the background, with progress; goes on past what it cannot read; leaves nothing old', async () => {
    const [first, second, gone] = [await readTap(), await readTap(), await readTap()]
    for (const { recordingId } of [first, second, gone]) await age(recordingId, { tension: 2222 })
    const { file_path: path } = await database().selectFrom('recordings').select('file_path').where('id', '=', gone.recordingId).executeTakeFirstOrThrow()
    await rm(join(stack.dataDir, 'recordings', path))
    expect((await state()).old.byVersion).toBeGreaterThanOrEqual(3)

    const { status, body } = await begin()
    expect(status).toBe(201)
    expect(body.run).toMatchObject({ state: 'running', byName: maker.person.name })
    expect((await begin()).status).toBe(409)
    expect((await begin('0.0.1')).status).toBe(409)

    const run = await ended()
    expect(run.state).toBe('finished')
    expect(run.read).toBeGreaterThanOrEqual(2)
    expect(run.failed).toBeGreaterThanOrEqual(1)
    expect(run.read + run.refused + run.failed).toBeGreaterThanOrEqual(run.total)
    for (const { drum, reading } of [first, second]) {
      const [point, ...more] = await historyOf(drum.id)
      expect(more).toEqual([])
      expect(point!.id).not.toBe(reading.id)
      expect((await kept(drum.headId)).readings).toBe(2)
    }
    expect((await historyOf(gone.drum.id)).map(point => point.id)).toEqual([gone.reading.id])
    expect((await maker.post(`/api/rereading/${run.id}/cancel`)).status).toBe(409)
  })

  it('can be stopped; what was read stays, the rest stays old', async () => {
    const drums = [await readTap(), await readTap(), await readTap()]
    for (const { recordingId } of drums) await age(recordingId)
    const { body } = await begin()
    const { status, body: stopped } = await maker.post<RereadingView>(`/api/rereading/${body.run!.id}/cancel`)
    expect(status).toBe(200)
    expect(stopped.run!.state).toBe('cancelled')
    expect((await ended()).state).toBe('cancelled')
    const count = async () => (await Promise.all(drums.map(({ drum }) => kept(drum.headId)))).reduce((sum, { readings }) => sum + readings, 0)
    // The one that was being read when it was stopped may still come.
    await new Promise(resolve => setTimeout(resolve, 1500))
    expect(await count()).toBeLessThanOrEqual(4)
  })
})
