import { beforeAll, describe, expect, it } from 'vitest'
import type { InstrumentView } from '../../shared/schemas/instrument'
import type { ReadingView } from '../../shared/schemas/reading'
import { arrangeReading, clearFilm, createInstrument, fixtureTap, uploadRecording } from '../support/bench'
import { database, signInAs } from '../support/stack'

type Signed = Awaited<ReturnType<typeof signInAs>>
let maker: Signed
let player: Signed
const TRUE_TENSION = 3000

beforeAll(async () => {
  [maker, player] = await Promise.all([signInAs('maker'), signInAs('customer')])
})

/** The drum as its maker believes it to be: the film 3 % too light. */
async function wronglyWeighed() {
  const drum = await createInstrument(player, { heads: [{ side: 'batter', film: clearFilm, arealDensityKgM2: 0.3475 * 0.97 }] })
  const { body } = await uploadRecording(maker, drum.headId, fixtureTap(TRUE_TENSION, 4))
  return { drum, reading: body.reading!, recordingId: body.recording.id! }
}

const calibrate = (client: Signed, headId: string, body: Record<string, unknown>) => client.post<InstrumentView & { message?: string, data?: { issues: { path: string }[] } }>(`/api/heads/${headId}/calibration`, body)
const known = (readingId: string, changes: Record<string, unknown> = {}) => ({ kind: 'known', readingId, nPerM: TRUE_TENSION, u95NPerM: 12, ...changes })
const readAgain = async (recordingId: string) => (await maker.post<{ reading: ReadingView }>(`/api/recordings/${recordingId}/read-again`)).body.reading
const rows = async (headId: string) => (await database().selectFrom('calibrations').select('id').where('head_id', '=', headId).where('removed_at', 'is', null).execute()).length

describe('a calibration at a known tension', () => {
  it('brings later readings of that head to the truth, narrows them, and stands on the head and the plate', async () => {
    const { drum, reading, recordingId } = await wronglyWeighed()
    // The wrong mass alone puts the tension off by 2 to 3 %: more than the simulated tap's own error.
    expect(reading.tension.nPerM / TRUE_TENSION).toBeLessThan(0.985)
    const { status, body } = await calibrate(maker, drum.headId, known(reading.id, { note: 'eight weights of 40 kg' }))
    expect(status).toBe(201)
    expect(body.heads[0]!.calibration).toMatchObject({ kind: 'known', knownNPerM: TRUE_TENSION, knownU95NPerM: 12, sourceReadingId: reading.id, note: 'eight weights of 40 kg', byName: maker.person.name })
    expect((await maker.get<ReadingView>(`/api/readings/${reading.id}`)).body).toMatchObject({ outdated: 'figures', calibration: null })

    const source = await readAgain(recordingId)
    expect(source.calibration).toMatchObject({ kind: 'known', knownNPerM: TRUE_TENSION })
    // 0.5 %: the known tension's own 0.4 %, and rounding of the fit.
    expect(Math.abs(source.tension.nPerM / TRUE_TENSION - 1)).toBeLessThan(0.005)
    const { body: later } = await uploadRecording(maker, drum.headId, fixtureTap(3300, 5))
    // 0.7 %: twice what was calibrated at 3000 N/m leaves open at 3300, by the budget's own word.
    expect(Math.abs(later.reading!.tension.nPerM / 3300 - 1)).toBeLessThan(0.007)
    expect(later.reading!.tension.u95NPerM / 3300).toBeLessThan(0.6 * reading.tension.u95NPerM / reading.tension.nPerM) // most of the budget was areal density and air
  })

  it('is taken off again, and an earlier one gives way to a newer', async () => {
    const { drum, reading, recordingId } = await wronglyWeighed()
    await calibrate(maker, drum.headId, known(reading.id))
    await calibrate(maker, drum.headId, known(reading.id, { nPerM: 3010 }))
    expect(await rows(drum.headId)).toBe(1)
    expect((await maker.delete(`/api/heads/${drum.headId}/calibration`)).status).toBe(204)
    expect((await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)).body.heads[0]!.calibration).toBeNull()
    expect((await readAgain(recordingId)).calibration).toBeNull()
    expect((await maker.delete(`/api/heads/${drum.headId}/calibration`)).status).toBe(404)
  })

  it('takes a reference reading for the truth as well', async () => {
    const { drum, reading } = await wronglyWeighed()
    const reference = await createInstrument(maker)
    const id = await arrangeReading(reference.headId, reference.id, TRUE_TENSION)
    const { status, body } = await calibrate(maker, drum.headId, { kind: 'reading', readingId: reading.id, referenceReadingId: id })
    expect(status).toBe(201)
    expect(body.heads[0]!.calibration).toMatchObject({ kind: 'reading', knownNPerM: TRUE_TENSION, referenceReadingId: id })
  })

  it('loses the film but keeps the air when a new film is mounted, and ends when the size changes', async () => {
    const { drum, reading } = await wronglyWeighed()
    await calibrate(maker, drum.headId, known(reading.id))
    const { body: before } = await maker.get<InstrumentView>(`/api/instruments/${drum.id}`)
    const { body: after } = await maker.patch<InstrumentView>(`/api/heads/${drum.headId}`, { film: { ...clearFilm, thicknessUm: 188 } })
    const [was, now] = [before.heads[0]!.calibration!.found, after.heads[0]!.calibration!.found]
    expect(now.airScaleOthers).toEqual(was.airScaleOthers)
    expect(now.arealDensityKgM2.value).toBeCloseTo(188e-6 * 1390, 9) // one ply times its density, exactly
    const { body: resized } = await maker.patch<InstrumentView>(`/api/instruments/${drum.id}`, { diameterMm: 331 })
    expect(resized.heads[0]!.calibration).toBeNull()
  })

  it.each([
    ['a tension that does not fit the tones', { nPerM: 900 }, 409],
    ['an uncertainty of nothing', { u95NPerM: 0 }, 400],
    ['a guess', { u95NPerM: 1000 }, 400],
    ['a tension below zero', { nPerM: -5 }, 400],
    ['a reading that nobody has', { readingId: '00000000-0000-4000-8000-000000000000' }, 404],
  ])('is refused for %s, in words, and changes nothing', async (_, changes, wanted) => {
    const { drum, reading } = await wronglyWeighed()
    const { status, body } = await calibrate(maker, drum.headId, known(reading.id, changes))
    expect(status).toBe(wanted)
    expect(body.message).toMatch(/\.$/)
    expect(await rows(drum.headId)).toBe(0)
    expect((await maker.get<ReadingView>(`/api/readings/${reading.id}`)).body.outdated).toBeNull()
  })

  it('is refused for a doubtful reading, for one of another head, and to customers', async () => {
    const { drum, reading } = await wronglyWeighed()
    const doubtful = await arrangeReading(drum.headId, drum.id, TRUE_TENSION, { doubtful: true })
    expect((await calibrate(maker, drum.headId, known(doubtful))).body.data?.issues[0]?.path).toBe('readingId')
    const stranger = await createInstrument(maker)
    expect((await calibrate(maker, stranger.headId, known(reading.id))).status).toBe(400)
    expect((await calibrate(player, drum.headId, known(reading.id))).status).toBe(403)
    expect(await rows(drum.headId)).toBe(0)
  })

  it('keeps its recording from being removed while it holds', async () => {
    const { drum, reading, recordingId } = await wronglyWeighed()
    await calibrate(maker, drum.headId, known(reading.id))
    expect((await maker.delete(`/api/recordings/${recordingId}`)).status).toBe(409)
    await maker.delete(`/api/heads/${drum.headId}/calibration`)
    expect((await maker.delete(`/api/recordings/${recordingId}`)).status).toBe(204)
  })
})

describe('figures that the maker measured', () => {
  it('narrow the budget: a weighed film and a measured diameter', async () => {
    const tap = fixtureTap(TRUE_TENSION, 6)
    const plain = await createInstrument(player)
    const measured = await createInstrument(player, {
      diameterU95Mm: 0.2,
      // 300 mm of a film of 0.3475 kg/m2: 24.563 g by the circle's area.
      heads: [{ side: 'batter', film: clearFilm, weighing: { shape: 'disc', massG: 24.563, massU95G: 0.02, sizeMm: 300, sizeU95Mm: 0.2 } }],
    })
    expect(measured.diameterU95Mm).toBe(0.2)
    expect(measured.heads[0]!.arealDensityKgM2).toBeCloseTo(0.3475, 4) // 24.563 g / (pi/4 0.3^2 m^2), to the gram's last digit
    const [wide, narrow] = [(await uploadRecording(player, plain.headId, tap)).body.reading!, (await uploadRecording(player, measured.headId, tap)).body.reading!]
    expect(narrow.tension.u95NPerM).toBeLessThan(0.75 * wide.tension.u95NPerM) // areal density alone is more than half of the variance of the plain one
    const share = (reading: ReadingView, name: string) => reading.budget.find(line => line.name === name)!.standardNPerM
    expect(share(narrow, 'areal density')).toBeLessThan(0.3 * share(wide, 'areal density')) // stated to 0.16 % in place of 2 %
  })

  it.each([
    ['a strip without its width', { weighing: { shape: 'strip', massG: 5, massU95G: 0.1, sizeMm: 200, sizeU95Mm: 0.5 } }, 'heads.0.weighing.widthMm'],
    ['a mass of nothing', { weighing: { shape: 'disc', massG: 0, massU95G: 0.1, sizeMm: 200, sizeU95Mm: 0.5 } }, 'heads.0.weighing.massG'],
    ['an uncertainty below zero', { arealDensityU95KgM2: -1 }, 'heads.0.arealDensityU95KgM2'],
  ])('are refused for %s, beside the field', async (_, changes, path) => {
    const { status, body } = await maker.post<{ data: { issues: { path: string }[] } }>('/api/instruments', {
      name: 'Odd', construction: 'fixture', diameterMm: 330.2, depthMm: 0, rodCount: 8, heads: [{ side: 'batter', film: clearFilm, ...changes }],
    })
    expect(status).toBe(400)
    expect(body.data.issues.map(issue => issue.path)).toContain(path)
  })
})
