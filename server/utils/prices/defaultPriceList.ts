import type { PriceList } from '../../../shared/schemas/prices'

/** What a new workshop starts from, in euro cents, net. The owner's own list replaces it by a later date. */
export const DEFAULT_CURRENCY = 'eur'

export const defaultPriceList: PriceList = {
  film: {
    pet: { firstPlyMinorPerM2: 14_000, furtherPlyMinorPerM2: 9_000, coatingMinorPerM2: 2_500 },
    skin: { firstPlyMinorPerM2: 52_000, furtherPlyMinorPerM2: 40_000, coatingMinorPerM2: 0 },
    woven: { firstPlyMinorPerM2: 24_000, furtherPlyMinorPerM2: 16_000, coatingMinorPerM2: 2_500 },
    other: { firstPlyMinorPerM2: 20_000, furtherPlyMinorPerM2: 14_000, coatingMinorPerM2: 2_500 },
  },
  collarMm: 25,
  mountingMinor: 1_500,
  tuningAndProofMinor: 2_400,
  zones: [
    {
      id: 'europe', label: 'Europe', shippingMinor: 950, vatBasisPoints: 1_900,
      countries: [
        'AT', 'BE', 'BG', 'CH', 'CY', 'CZ', 'DE', 'DK', 'EE', 'ES', 'FI', 'FR', 'GB', 'GR', 'HR', 'HU', 'IE', 'IS', 'IT', 'LI', 'LT', 'LU', 'LV',
        'MT', 'NL', 'NO', 'PL', 'PT', 'RO', 'SE', 'SI', 'SK',
      ],
    },
    { id: 'world', label: 'elsewhere', shippingMinor: 2_900, vatBasisPoints: 1_900, countries: [] },
  ],
  homeCountry: 'DE',
  makingDays: 14,
  quoteDays: 14,
}
