import { randomUUID } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { arrangeDrum, arrangeReadings } from '../support/history'
import { createUser, signInAs } from '../support/stack'

const HEADER = 'taken_at,instrument_code,instrument,construction,owner,side,strike,tension_n_per_m,u95_n_per_m,fundamental_hz,note,cents,evenness_percent,temperature_c,confidence,doubtful,maker,reading_id'
const lines = (text: string) => text.trimEnd().split('\r\n')

describe('the CSV export of the history table', () => {
  it('holds what is filtered, in the order of the table, with a header and a dated file name', async () => {
    const staff = await signInAs('staff')
    const tag = randomUUID().slice(0, 8)
    const owner = await createUser('customer', { name: `Ólöf ${tag}` })
    const drum = await arrangeDrum({ name: `Tom ${tag}`, customerId: owner.id })
    const [id] = await arrangeReadings(drum, [
      { takenAt: new Date('2026-03-04T05:06:07Z'), tension: 3120.456, hz: 440, evenness: 4.2, temperature: -3.5 },
      { takenAt: new Date('2026-03-03T05:06:07Z'), tension: 900 },
    ])
    await arrangeReadings(await arrangeDrum(), [{}])
    const { status, body, headers } = await staff.get<string>(`/api/readings/export?q=${tag}&limit=1`)
    expect(status).toBe(200)
    expect(headers.get('content-type')).toBe('text/csv; charset=utf-8')
    expect(headers.get('content-disposition')).toMatch(/^attachment; filename="readings-\d{4}-\d\d-\d\d\.csv"$/)
    const [head, first, ...rest] = lines(body)
    expect(head).toBe(HEADER)
    // 440 Hz is A4 on the cent: ISO 16:1975.
    expect(first).toBe(`2026-03-04T05:06:07.000Z,${drum.code},Tom ${tag},open,Ólöf ${tag},batter,centre,3120.46,60,440,A4,0,4.2,-3.5,0.9,no,,${id}`)
    expect(rest).toHaveLength(1)
  })

  it('leaves no cell that a spreadsheet would run as a formula', async () => {
    const staff = await signInAs('staff')
    const tag = randomUUID().slice(0, 8)
    for (const start of ['=', '+', '-', '@', '\t=']) await arrangeReadings(await arrangeDrum({ name: `${start}1+1,"${tag}"` }), [{}])
    const { body } = await staff.get<string>(`/api/readings/export?q=${tag}`)
    const names = lines(body).slice(1)
    expect(names).toHaveLength(5)
    // An apostrophe in front makes it a text (OWASP, CSV injection); quotes are doubled (RFC 4180).
    for (const line of names) expect(line).toMatch(/,"'[=+\-@\t]=?1\+1,""\w+""",open,/)
  })

  it('crosses its batches without losing or repeating a row', async () => {
    const staff = await signInAs('staff')
    const tag = randomUUID().slice(0, 8)
    const drum = await arrangeDrum({ name: tag })
    // 2500 rows are two full batches of 1000 and a part; all at one moment, the hardest order.
    const ids = await arrangeReadings(drum, Array.from({ length: 2500 }, () => ({ takenAt: new Date('2026-01-01T00:00:00Z') })))
    const { body } = await staff.get<string>(`/api/readings/export?q=${tag}&sort=takenAt`)
    expect(lines(body).slice(1).map(line => line.split(',').at(-1)).toSorted()).toEqual(ids.toSorted())
  })

  it('gives an empty table as its header', async () => {
    const staff = await signInAs('staff')
    expect(lines((await staff.get<string>(`/api/readings/export?q=${randomUUID()}`)).body)).toEqual([HEADER])
  })

  it('refuses a customer', async () => {
    const customer = await signInAs('customer')
    expect((await customer.get('/api/readings/export')).status).toBe(403)
  })
})
