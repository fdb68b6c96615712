import type { HeadPrice, PriceLine } from '../../../shared/schemas/order'
import type { PriceList, PriceZone } from '../../../shared/schemas/prices'

export interface PricedFilm { name: string, material: keyof PriceList['film'], plies: number, coating: string | null }

/** Disc of film that is cut for a head, m2: the vibrating diameter and the collar all round. */
export function blankAreaM2(diameterMm: number, collarMm: number): number {
  return Math.PI * ((diameterMm / 2 + collarMm) / 1000) ** 2
}

/** Net lines of one head: film by area and plies, mounting, tuning and proof. Each is rounded to whole cents, halves up. */
export function headLines(list: PriceList, film: PricedFilm, diameterMm: number): PriceLine[] {
  const areaM2 = blankAreaM2(diameterMm, list.collarMm)
  const { firstPlyMinorPerM2, furtherPlyMinorPerM2, coatingMinorPerM2 } = list.film[film.material]
  const perM2 = firstPlyMinorPerM2 + (film.plies - 1) * furtherPlyMinorPerM2 + (film.coating ? coatingMinorPerM2 : 0)
  return [
    { kind: 'film', label: `${film.name}, ${areaM2.toFixed(2)} m²`, amountMinor: Math.round(areaM2 * perM2) },
    { kind: 'mounting', label: 'Mounting', amountMinor: list.mountingMinor },
    { kind: 'tuning', label: 'Tuning and proof', amountMinor: list.tuningAndProofMinor },
  ]
}

export function findZone(list: PriceList, country: string): PriceZone {
  return list.zones.find(zone => zone.countries.includes(country)) ?? list.zones.find(zone => zone.countries.length === 0)!
}

/**
 * Adds shipping, once for all heads, and VAT, and sums. VAT is reckoned once on the sum of all net lines and rounded to
 * whole cents, halves up, in integer arithmetic.
 */
export function addUp(list: PriceList, currency: string, heads: PriceLine[][], country: string): HeadPrice {
  const zone = findZone(list, country)
  const several = heads.length > 1
  const lines: PriceLine[] = heads.flatMap((head, index) => head.map(line => ({ ...line, label: several ? `Head ${index + 1}: ${line.label}` : line.label })))
  lines.push({ kind: 'shipping', label: `Shipping, ${zone.label}`, amountMinor: zone.shippingMinor })
  const net = lines.reduce((sum, line) => sum + line.amountMinor, 0)
  if (zone.vatBasisPoints) lines.push({ kind: 'vat', label: `VAT ${zone.vatBasisPoints / 100} %`, amountMinor: Math.floor((net * zone.vatBasisPoints + 5_000) / 10_000) })
  return { currency, lines, totalMinor: lines.reduce((sum, line) => sum + line.amountMinor, 0) }
}
