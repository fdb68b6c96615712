import { describe, expect, it } from 'vitest'
import { crossOrder } from '../../../server/utils/turns/crossOrder'

const counts = Array.from({ length: 22 }, (_, i) => i + 3)
const apart = (a: number, b: number, n: number) => Math.min(Math.abs(a - b), n - Math.abs(a - b))

describe('the cross order of rods', () => {
  it.each(counts)('visits each of %i rods once', (n) => {
    expect([...crossOrder(n)].sort((a, b) => a - b)).toEqual(Array.from({ length: n }, (_, i) => i + 1))
  })

  it.each(counts.filter(n => n >= 5))('never goes from one of %i rods to its neighbour', (n) => {
    const order = crossOrder(n)
    for (let i = 1; i < n; i++) expect(apart(order[i - 1]!, order[i]!, n), `${order}`).toBeGreaterThanOrEqual(2)
  })

  it.each(counts.filter(n => n % 2 === 0))('goes to the opposite of %i rods at every other step', (n) => {
    const order = crossOrder(n)
    for (let i = 0; i < n; i += 2) expect(apart(order[i]!, order[i + 1]!, n)).toBe(n / 2)
  })

  it('is the star that drummers know for eight and five rods', () => {
    // Common practice, no source: opposite pairs a quarter turn apart, then those between; a five-pointed star.
    expect(crossOrder(8)).toEqual([1, 5, 3, 7, 2, 6, 4, 8])
    expect(crossOrder(5)).toEqual([1, 3, 5, 2, 4])
  })
})
