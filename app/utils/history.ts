/** '1 204' with thin spaces; four digits stay together, as in print. */
export function groupThousands(value: number): string {
  const digits = String(Math.round(value))
  return digits.length < 5 ? digits : digits.replace(/\B(?=(\d{3})+$)/g, '\u2009')
}
