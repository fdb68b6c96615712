import { describe, expect, it } from 'vitest'
import { figure, figureWithUncertainty, fixed, noteWithCents, signed } from '../../../app/utils/figures'
import { formatDate, formatDateTime } from '../../../app/utils/dates'
import { fromPrevious, sixteenths, turnInWords } from '../../../app/utils/turns'
import { formatLength, fromField, LENGTH, THICKNESS, toField } from '../../../app/utils/units'

describe('figures on a plate', () => {
  it('cuts digits to what the uncertainty supports', () => {
    // GUM (JCGM 100:2008) 7.2.6: no more than two significant digits of an uncertainty.
    expect(figure(3120.4, 62.1)).toBe('3120')
    expect(figure(142.3149, 0.05)).toBe('142.31')
    expect(figure(9123, 1840)).toBe('9100')
    expect(figureWithUncertainty(3120.4, 62.1)).toBe('3120\u2009\u00B1\u200962')
  })

  it('writes a true minus, and no minus before a zero', () => {
    expect(fixed(-2.25, 1)).toBe('\u22122.3')
    expect(fixed(-0.04, 1)).toBe('0.0')
    expect(signed(0.04, 1)).toBe('0.0')
    expect(signed(3)).toBe('+3')
  })

  it('names a pitch by its nearest note and cents', () => {
    // ISO 16:1975, A4 = 440 Hz: D3 is 146.83 Hz in twelve-tone equal temperament.
    expect(noteWithCents(146.832)).toBe('D3')
    expect(noteWithCents(142.3)).toBe('C\u266F3 +46 cents')
  })

  it('writes dates alike wherever the reader sits', () => {
    expect(formatDate('2026-12-01T23:59:00.000Z')).toBe('1 Dec 2026')
    expect(formatDateTime('2026-12-01T09:05:00.000Z')).toBe('1 Dec 2026, 09:05 UTC')
  })
})

describe('units at the edge of forms', () => {
  it('takes an inch as 25.4 mm and a mil as 25.4 um', () => {
    // The international yard and pound agreement of 1959: 1 in = 25.4 mm exactly.
    expect(fromField(LENGTH, 'in', '14')).toBeCloseTo(355.6, 9) // 9 digits: rounding of doubles
    expect(fromField(THICKNESS, 'mil', '10')).toBeCloseTo(254, 9) // 9 digits: rounding of doubles
    expect(toField(LENGTH, 'in', 355.6)).toBe('14')
    expect(formatLength(349.25, 'trade')).toBe('13.75\u2009in')
    expect(formatLength(349.25, 'si')).toBe('349\u2009mm')
  })

  it('reads a decimal comma and refuses what is no number', () => {
    expect(fromField(LENGTH, 'mm', '355,6')).toBe(355.6)
    expect(fromField(LENGTH, 'mm', 'wide')).toBeUndefined()
    expect(fromField(LENGTH, 'mm', ' ')).toBeUndefined()
  })
})

describe('turns in words', () => {
  it('counts in sixteenths with the direction first', () => {
    expect(sixteenths(3 / 16)).toBe('+3/16')
    expect(sixteenths(-1 / 16)).toBe('\u22121/16')
    expect(turnInWords(3 / 16)).toBe('Tighten, clockwise, three sixteenths')
    expect(turnInWords(-1 / 16)).toBe('Slacken, anticlockwise, one sixteenth')
    expect(turnInWords(0)).toBe('Leave this rod as it is')
  })

  it('says where a rod lies against the one before', () => {
    expect(fromPrevious(5, 1, 8)).toBe('straight across from rod 1')
    expect(fromPrevious(1, 8, 8)).toBe('next to rod 8')
    expect(fromPrevious(3, 5, 8)).toBe('2 back from rod 5, anticlockwise')
  })
})
