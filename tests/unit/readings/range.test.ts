import { describe, expect, it } from 'vitest'
import { readRange } from '../../../server/utils/readings/range'

describe('a Range header', () => {
  // RFC 9110, section 14.1.2: the examples for a representation of length 10 000.
  it.each([
    ['bytes=0-499', { first: 0, last: 499 }],
    ['bytes=500-999', { first: 500, last: 999 }],
    ['bytes=-500', { first: 9500, last: 9999 }],
    ['bytes=9500-', { first: 9500, last: 9999 }],
    ['bytes=9500-20000', { first: 9500, last: 9999 }],
    ['bytes=-20000', { first: 0, last: 9999 }],
  ])('reads %s of 10 000 bytes', (header, range) => {
    expect(readRange(header, 10_000)).toEqual(range)
  })

  it.each([undefined, '', 'items=0-1', 'bytes=', 'bytes=-', 'bytes=5-3', 'bytes=0-1,4-5', 'bytes=a-b'])('ignores %s', (header) => {
    expect(readRange(header, 10_000)).toBe('whole')
  })

  it.each(['bytes=10000-', 'bytes=12000-13000', 'bytes=-0'])('finds no byte in %s', (header) => {
    expect(readRange(header, 10_000)).toBe('beyond')
  })
})
