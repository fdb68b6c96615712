import { z } from 'zod'

/** Money is an integer in the currency's minor unit (cents); 10 million cents is more than any head costs. */
const minor = z.number().int('Amounts are whole minor units (cents).').min(0).max(10_000_000)

/** Price of film by the area of the blank; further plies cost less than the first, being cut in the same pass. */
const filmPriceSchema = z.object({ firstPlyMinorPerM2: minor, furtherPlyMinorPerM2: minor, coatingMinorPerM2: minor })
export type FilmPrice = z.infer<typeof filmPriceSchema>

const zoneSchema = z.object({
  id: z.string().min(1).max(40),
  label: z.string().min(1).max(60),
  /** ISO 3166-1 alpha-2; empty = every country that no other zone names. */
  countries: z.array(z.string().regex(/^[A-Z]{2}$/)),
  shippingMinor: minor,
  /** Parts in ten thousand: 1900 = 19 %. */
  vatBasisPoints: z.number().int().min(0).max(10_000),
})
export type PriceZone = z.infer<typeof zoneSchema>

/**
 * A dated price list. Lists are added, never changed: what was quoted from one stays reproducible.
 * Amounts are net; VAT is a line of its own.
 */
export const priceListSchema = z.object({
  film: z.object({ pet: filmPriceSchema, skin: filmPriceSchema, woven: filmPriceSchema, other: filmPriceSchema }),
  /** Film cut beyond the vibrating radius, all round, for collar and hoop, mm. */
  collarMm: z.number().min(0).max(200),
  mountingMinor: minor,
  tuningAndProofMinor: minor,
  zones: z.array(zoneSchema).min(1).refine(zones => zones.filter(zone => zone.countries.length === 0).length === 1, 'One zone takes every other country.'),
  /** Country whose zone a quote assumes until an address is known. */
  homeCountry: z.string().regex(/^[A-Z]{2}$/),
  /** From payment to dispatch, calendar days. */
  makingDays: z.number().int().min(1).max(365),
  quoteDays: z.number().int().min(1).max(365),
})
export type PriceList = z.infer<typeof priceListSchema>

export const priceLineKinds = ['film', 'mounting', 'tuning', 'shipping', 'vat'] as const
export type PriceLineKind = (typeof priceLineKinds)[number]
