import { request } from 'node:http'
import { beforeAll, describe, expect, it } from 'vitest'
import type { InstrumentView } from '../../shared/schemas/instrument'
import type { RecordingView } from '../../shared/schemas/reading'
import { createInstrument, fixtureTap, kept, soundWav, uploadForm, type UploadAnswer, uploadRecording } from '../support/bench'
import { Client, signInAs, stack } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>

let staff: Signed
let player: Signed
let other: Signed
let drum: InstrumentView & { headId: string }
const tap = fixtureTap(3000)
const png = new Uint8Array([0x89, 0x50, 0x4E, 0x47, 0x0D, 0x0A, 0x1A, 0x0A, ...new Uint8Array(4000)])

beforeAll(async () => {
  [staff, player, other] = await Promise.all([signInAs('staff'), signInAs('customer'), signInAs('customer')])
  drum = await createInstrument(player)
})

/** Byte 22 of a plain header is the number of channels. */
const withByte = (bytes: typeof tap, at: number, value: number) => bytes.map((byte, i) => i === at ? value : byte)
const sine = (t: number) => Math.sin(2 * Math.PI * 200 * t)
/** Voiced sound with a slow rise and syllables, as speech has. */
const speech = (t: number) => 0.3 * Math.max(0, Math.sin(2 * Math.PI * 2.5 * t)) * [1, 2, 3, 4, 5].reduce((sum, k) => sum + Math.sin(2 * Math.PI * k * (120 + 15 * Math.sin(5 * t)) * t) / k, 0)
const clippedTap = (t: number) => t < 0.3 ? 0 : Math.max(-1, Math.min(1, 20 * Math.exp(-3 * (t - 0.3)) * Math.sin(2 * Math.PI * 150 * (t - 0.3))))

describe('uploading a tap', () => {
  it('gives a reading in the shape that the contract states, and keeps the sound', async () => {
    const before = await kept(drum.headId)
    const { status, body } = await uploadRecording(player, drum.headId, tap, { rod: '2', temperatureC: '20', note: 'after the gig' })
    expect(status).toBe(201)
    expect(body.recording).toMatchObject({ headId: drum.headId, instrumentId: drum.id, strike: 'edge', rod: 2, firstRod: 1, centreDamped: false, temperatureC: 20, note: 'after the gig', refusal: null, privateToMaker: false })
    const reading = body.reading!
    expect(reading).toMatchObject({ headId: drum.headId, instrumentId: drum.id, strike: 'edge', rim: null, makerName: player.person.name, recording: { id: body.recording.id, audible: true } })
    expect(Date.now() - new Date(reading.takenAt).getTime()).toBeLessThan(60_000)
    // 2 %: what the issue asks of fixture heads at 30 dB; the truth is the simulated drum's.
    expect(Math.abs(reading.tension.nPerM / 3000 - 1)).toBeLessThan(0.02)
    expect(reading.tension.u95NPerM).toBeGreaterThan(reading.tension.repeatabilityU95NPerM)
    expect(reading.taps).toHaveLength(1)
    expect(reading.modes.length).toBeGreaterThan(2)
    for (const mode of reading.modes) expect(mode).toMatchObject({ m: expect.any(Number), n: expect.any(Number), measuredHz: expect.any(Number), u95Hz: expect.any(Number), predictedHz: expect.any(Number), levelDb: expect.any(Number), t60S: expect.any(Number) })
    expect(reading.sound.waveform.minMax).toHaveLength(2 * reading.sound.waveform.columns)
    expect(reading.filmStress!.mPa).toBeCloseTo(reading.tension.nPerM / 250e-6 / 1e6, 6) // stress is tension over thickness
    expect(await kept(drum.headId)).toEqual({ rows: before.rows + 1, readings: before.readings + 1, files: before.files + 1, unfinished: before.unfinished })
    expect((await player.get(`/api/readings/${reading.id}`)).body).toEqual(reading)
    expect((await player.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.lastReading).toMatchObject({ id: reading.id, side: 'batter', fundamentalHz: reading.fundamentalHz })
  })

  it('takes a finger on the centre for granted at the edge, not at the centre, and believes what is said', async () => {
    const damped = async (fields: Record<string, string>) => {
      const { body } = await player.send<UploadAnswer>('POST', `/api/heads/${drum.headId}/recordings`, uploadForm(tap, fields))
      return (body.recording as RecordingView).centreDamped
    }
    expect(await damped({ strike: 'edge' })).toBe(true)
    expect(await damped({ strike: 'round' })).toBe(true)
    expect(await damped({ strike: 'centre' })).toBe(false)
    expect(await damped({ strike: 'edge', centreDamped: 'false' })).toBe(false)
  })

  it('takes fields that follow the file, and empty boxes of a form as not filled in', async () => {
    const form = uploadForm(tap)
    for (const [name, value] of [['strike', 'edge'], ['rod', ''], ['note', ''], ['temperatureC', '']]) form.append(name!, value!)
    const { status, body } = await player.send<UploadAnswer>('POST', `/api/heads/${drum.headId}/recordings`, form)
    expect(status).toBe(201)
    expect(body.recording).toMatchObject({ rod: null, note: null, temperatureC: 20 })
  })
})

describe('an upload that is refused', () => {
  it.each([
    ['a PNG with another name', () => png, 'not-wav'],
    ['an empty file', () => new Uint8Array(0), 'not-wav'],
    ['a WAV whose header lies', () => withByte(tap, 22, 0), 'not-wav'],
    ['a rate below what heads need', () => soundWav(1, sine, 4000), 'low-rate'],
  ])('stores nothing of %s', async (_, make, code) => {
    const before = await kept(drum.headId)
    const { status, body } = await uploadRecording(player, drum.headId, make())
    expect(status).toBe(422)
    expect(body).toMatchObject({ statusCode: 422, reading: null, recording: { id: null, refusal: { code } } })
    expect(body.message).toBe(body.recording.refusal!.message)
    expect(await kept(drum.headId)).toEqual(before)
  })

  it.each([
    ['silence', () => soundWav(1, () => 0), ['silent']],
    ['20 ms', () => soundWav(0.02, sine), ['too-short']],
    ['a clipped tap', () => soundWav(2, clippedTap), ['clipped']],
    // Which of the two depends on whether a syllable starts like a tap; both tell the person the same.
    ['speech', () => soundWav(3, speech), ['not-a-drum', 'no-tap']],
  ])('keeps the sound of %s with the reason, and no reading', async (_, make, codes) => {
    const before = await kept(drum.headId)
    const { status, body } = await uploadRecording(player, drum.headId, make())
    expect(status).toBe(422)
    expect(codes).toContain(body.recording.refusal!.code)
    expect(body).toMatchObject({ statusCode: 422, reading: null, recording: { id: expect.any(String), headId: drum.headId } })
    expect(await kept(drum.headId)).toEqual({ ...before, rows: before.rows + 1, files: before.files + 1 })
  })

  it('reads a WAV that was cut short as far as it goes, or says why not', async () => {
    const { status, body } = await uploadRecording(player, drum.headId, tap.slice(0, 1000))
    expect(status).toBe(422)
    expect(body.recording.refusal).toBeTruthy()
  })

  it.each([
    ['no strike', {}, 'strike'],
    ['a strike unheard of', { strike: 'rimshot' }, 'strike'],
    ['a rod that the drum lacks', { strike: 'edge', rod: '9' }, 'rod'],
    ['a first rod of 0', { strike: 'round', firstRod: '0' }, 'firstRod'],
    ['a temperature of a kiln', { strike: 'edge', temperatureC: '900' }, 'temperatureC'],
  ])('names the field of %s and stores nothing', async (_, fields, path) => {
    const before = await kept(drum.headId)
    const { status, body } = await player.send<UploadAnswer>('POST', `/api/heads/${drum.headId}/recordings`, uploadForm(tap, fields as Record<string, string>))
    expect(status).toBe(400)
    expect(body.data?.issues?.map(issue => issue.path)).toContain(path)
    expect(await kept(drum.headId)).toEqual(before)
  })

  it('refuses no file, two files, a file in another field, and JSON', async () => {
    const before = await kept(drum.headId)
    const path = `/api/heads/${drum.headId}/recordings`
    expect((await player.send('POST', path, uploadForm(null, { strike: 'edge' }))).status).toBe(400)
    const two = uploadForm(tap, { strike: 'edge' })
    two.append('file', new Blob([tap]), 'second.wav')
    expect((await player.send('POST', path, two)).status).toBe(400)
    const elsewhere = uploadForm(null, { strike: 'edge' })
    elsewhere.append('sound', new Blob([tap]), 'tap.wav')
    expect((await player.send('POST', path, elsewhere)).status).toBe(400)
    expect((await player.post(path, { strike: 'edge' })).status).toBe(415)
    expect(await kept(drum.headId)).toEqual(before)
  })

  it('keeps staff, strangers and other customers from uploading', async () => {
    const before = await kept(drum.headId)
    expect((await uploadRecording(staff, drum.headId, tap)).status).toBe(403)
    expect((await uploadRecording(other, drum.headId, tap)).status).toBe(404)
    expect((await uploadRecording(new Client(), drum.headId, tap)).status).toBe(401)
    expect(await kept(drum.headId)).toEqual(before)
  })
})

/** A multipart upload written by hand, so that it can claim, omit or break off what a browser would not. */
function rawUpload(options: { length?: number, send: number, breakOff?: boolean }): Promise<{ status: number, body: UploadAnswer } | 'broken'> {
  return new Promise((resolve) => {
    const boundary = 'a-boundary'
    const head = `--${boundary}\r\ncontent-disposition: form-data; name="strike"\r\n\r\nedge\r\n--${boundary}\r\ncontent-disposition: form-data; name="file"; filename="x.wav"\r\n\r\n`
    const call = request(new URL(`/api/heads/${drum.headId}/recordings`, stack.baseUrl), {
      method: 'POST',
      headers: { 'content-type': `multipart/form-data; boundary=${boundary}`, 'cookie': player.cookieHeader(), ...(options.length === undefined ? {} : { 'content-length': options.length }) },
    }, (response) => {
      let text = ''
      response.setEncoding('utf8').on('data', (chunk: string) => text += chunk).on('end', () => {
        resolve({ status: response.statusCode!, body: JSON.parse(text) as UploadAnswer })
        call.destroy()
      })
    })
    call.on('error', () => resolve('broken'))
    call.write(head)
    const chunk = Buffer.alloc(1024 * 1024)
    let left = options.send
    const write = () => {
      while (left > 0) {
        left -= chunk.length
        if (!call.write(chunk)) return void call.once('drain', write)
      }
      if (options.breakOff) setTimeout(() => call.destroy(), 200)
      else if (options.length === undefined) call.end(`\r\n--${boundary}--\r\n`)
    }
    write()
  })
}

describe('an upload that is too large', () => {
  const MB = 1024 * 1024

  it('is refused by its stated length before it is read', async () => {
    const before = await kept(drum.headId)
    const answer = await rawUpload({ length: 900 * MB, send: MB })
    expect(answer).toMatchObject({ status: 422, body: { reading: null, recording: { id: null, refusal: { code: 'too-large' } } } })
    expect(await kept(drum.headId)).toEqual(before)
  })

  it('is refused by what was counted where no length is stated', async () => {
    const before = await kept(drum.headId)
    const answer = await rawUpload({ send: 52 * MB })
    expect(answer).toMatchObject({ status: 422, body: { reading: null, recording: { id: null, refusal: { code: 'too-large' } } } })
    expect(await kept(drum.headId)).toEqual(before)
  })

  it('leaves nothing behind when it breaks off half-way', async () => {
    const before = await kept(drum.headId)
    expect(await rawUpload({ length: 20 * MB, send: 2 * MB, breakOff: true })).toBe('broken')
    await expect.poll(() => kept(drum.headId), { timeout: 10_000 }).toEqual(before)
  })
})
