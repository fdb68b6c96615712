import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { beforeAll, describe, expect, it } from 'vitest'
import { createInstrument, fixtureTap, kept, uploadRecording } from '../support/bench'
import { Client, database, signInAs, stack } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>

let maker: Signed
let staff: Signed
let player: Signed
let other: Signed
let drum: Awaited<ReturnType<typeof createInstrument>>
const tap = fixtureTap(3000)

beforeAll(async () => {
  [maker, staff, player, other] = await Promise.all([signInAs('maker'), signInAs('staff'), signInAs('customer'), signInAs('customer')])
  drum = await createInstrument(player)
})

describe('hearing a recording again', () => {
  let recordingId: string
  let privateId: string

  beforeAll(async () => {
    recordingId = (await uploadRecording(player, drum.headId, tap)).body.recording.id!
    privateId = (await uploadRecording(player, drum.headId, tap, { privateToMaker: 'true' })).body.recording.id!
  })

  const part = (range: string) => fetch(new URL(`/api/recordings/${recordingId}/audio`, stack.baseUrl), { headers: { cookie: player.cookieHeader(), range } })

  it('gives the same bytes as WAV', async () => {
    const response = await fetch(new URL(`/api/recordings/${recordingId}/audio`, stack.baseUrl), { headers: { cookie: player.cookieHeader() } })
    expect(response.status).toBe(200)
    expect(response.headers.get('content-type')).toBe('audio/wav')
    expect(response.headers.get('accept-ranges')).toBe('bytes')
    expect(Buffer.from(await response.arrayBuffer()).equals(tap)).toBe(true)
  })

  it('gives parts of it by Range', async () => {
    const response = await part('bytes=100-199')
    expect(response.status).toBe(206)
    expect(response.headers.get('content-range')).toBe(`bytes 100-199/${tap.length}`)
    expect(Buffer.from(await response.arrayBuffer()).equals(tap.slice(100, 200))).toBe(true)
    expect((await part(`bytes=${tap.length}-`)).status).toBe(416)
  })

  it('keeps what is private to the maker from staff, and everything from strangers', async () => {
    const status = async (client: Client, id: string) => (await client.send('GET', `/api/recordings/${id}/audio`)).status
    expect(await status(staff, recordingId)).toBe(200)
    expect(await status(staff, privateId)).toBe(403)
    expect(await status(maker, privateId)).toBe(200)
    expect(await status(player, privateId)).toBe(200)
    expect(await status(other, recordingId)).toBe(404)
    expect(await status(new Client(), recordingId)).toBe(401)
  })

  it('tells staff on the reading that they may not hear it', async () => {
    const row = await database().selectFrom('readings').select('id').where('recording_id', '=', privateId).executeTakeFirstOrThrow()
    expect((await staff.get(`/api/readings/${row.id}`)).body).toMatchObject({ recording: { audible: false } })
    expect((await maker.get(`/api/readings/${row.id}`)).body).toMatchObject({ recording: { audible: true } })
  })

  it('keeps the file under a name of its own inside the data folder', async () => {
    const row = await database().selectFrom('recordings').select('file_path').where('id', '=', recordingId).executeTakeFirstOrThrow()
    expect(row.file_path).toBe(join(recordingId.slice(0, 2), `${recordingId}.wav`))
    expect(readFileSync(join(stack.dataDir, 'recordings', row.file_path)).equals(tap)).toBe(true)
  })

  it('goes with its reading and file when the maker deletes it, and for nobody else', async () => {
    const { body } = await uploadRecording(player, drum.headId, tap)
    const before = await kept(drum.headId)
    expect((await player.delete(`/api/recordings/${body.recording.id}`)).status).toBe(403)
    expect((await staff.delete(`/api/recordings/${body.recording.id}`)).status).toBe(403)
    expect(await kept(drum.headId)).toEqual(before)
    expect((await maker.delete(`/api/recordings/${body.recording.id}`)).status).toBe(204)
    expect(await kept(drum.headId)).toEqual({ ...before, rows: before.rows - 1, readings: before.readings - 1, files: before.files - 1 })
    expect((await player.get(`/api/readings/${body.reading!.id}`)).status).toBe(404)
  })
})
