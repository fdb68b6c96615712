/** An amount in integer minor units (cents) in words of the currency, e.g. 12959 eur -> €129.59. */
export function formatMoney(amountMinor: number, currency: string): string {
  const format = new Intl.NumberFormat('en-GB', { style: 'currency', currency: currency.toUpperCase() })
  const digits = format.resolvedOptions().maximumFractionDigits ?? 2
  return format.format(amountMinor / 10 ** digits)
}
