import { describe, expect, it } from 'vitest'
import { priceListSchema } from '../../../shared/schemas/prices'
import { addUp, blankAreaM2, findZone, headLines, type PricedFilm } from '../../../server/utils/prices/calculate'
import { defaultPriceList } from '../../../server/utils/prices/defaultPriceList'

const film: PricedFilm = { name: 'Clear 250', material: 'pet', plies: 1, coating: null }

/** A repeatable source of chance: mulberry32, seeded, so that a failure can be run again. */
function chance(seed: number): () => number {
  return () => {
    seed = seed + 0x6D2B79F5 | 0
    let t = Math.imul(seed ^ seed >>> 15, 1 | seed)
    t = t + Math.imul(t ^ t >>> 7, 61 | t) ^ t
    return ((t ^ t >>> 14) >>> 0) / 4294967296
  }
}

describe('the price of a head', () => {
  it('starts from a price list that its own schema accepts', () => {
    expect(priceListSchema.safeParse(defaultPriceList).success).toBe(true)
  })

  it('takes film by the area of the blank: the diameter and the collar all round', () => {
    // Area of a disc of 0.2 m radius: pi * 0.04 = 0.125664 m2, by hand.
    expect(blankAreaM2(350, 25)).toBeCloseTo(0.125664, 6) // six decimals were reckoned by hand
    const [line] = headLines(defaultPriceList, film, 350)
    // 0.125664 m2 at 140.00 a m2 = 17.59, by hand.
    expect(line).toEqual({ kind: 'film', label: 'Clear 250, 0.13 m²', amountMinor: 1759 })
  })

  it('charges further plies and a coating by their own prices', () => {
    const filmMinor = (changes: Partial<PricedFilm>) => headLines(defaultPriceList, { ...film, ...changes }, 350)[0]!.amountMinor
    // 0.125664 m2 * (140 + 90) = 28.90; * (140 + 25) = 20.73, by hand.
    expect(filmMinor({ plies: 2 })).toBe(2890)
    expect(filmMinor({ coating: 'white grain' })).toBe(2073)
  })

  it('reckons VAT once on the sum and rounds halves up', () => {
    const list = { ...defaultPriceList, zones: [{ id: 'all', label: 'everywhere', countries: [], shippingMinor: 0, vatBasisPoints: 1_000 }] }
    const vat = (netMinor: number) => addUp(list, 'eur', [[{ kind: 'film', label: 'x', amountMinor: netMinor }]], 'DE').lines.find(line => line.kind === 'vat')!.amountMinor
    // 10 % of 1.05 is 10.5 cents, up to 11; of 1.04 is 10.4, down to 10: by hand.
    expect([vat(105), vat(104), vat(100)]).toEqual([11, 10, 10])
  })

  it('has lines that sum to the total, in whole cents, for any cart and country', () => {
    const random = chance(20_261_201)
    const pick = <T>(items: readonly T[]) => items[Math.floor(random() * items.length)]!
    for (let run = 0; run < 2_000; run++) {
      const heads = Array.from({ length: 1 + Math.floor(random() * 10) }, () => headLines(defaultPriceList, {
        name: 'Film', material: pick(['pet', 'skin', 'woven', 'other'] as const), plies: 1 + Math.floor(random() * 4), coating: pick([null, 'grain']),
      }, 75 + random() * 1525))
      const { lines, totalMinor } = addUp(defaultPriceList, 'eur', heads, pick(['DE', 'GB', 'NZ', 'US', 'FR']))
      expect(lines.reduce((sum, line) => sum + line.amountMinor, 0)).toBe(totalMinor)
      for (const line of lines) expect(Number.isInteger(line.amountMinor) && line.amountMinor >= 0, line.label).toBe(true)
      const net = lines.filter(line => line.kind !== 'vat').reduce((sum, line) => sum + line.amountMinor, 0)
      const vat = lines.find(line => line.kind === 'vat')!.amountMinor
      expect(Math.abs(vat - net * 0.19)).toBeLessThanOrEqual(0.5) // rounding to whole cents moves it by half a cent at most
      expect(lines.filter(line => line.kind === 'shipping')).toHaveLength(1)
    }
  })

  it('sends any country that no zone names to the one zone for the rest', () => {
    expect(findZone(defaultPriceList, 'FR').id).toBe('europe')
    expect(findZone(defaultPriceList, 'NZ').id).toBe('world')
  })
})
