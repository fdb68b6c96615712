const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec']

/** '1 Dec 2026', in UTC, so that server and browser write the same. */
export function formatDate(iso: string): string {
  const date = new Date(iso)
  return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${date.getUTCFullYear()}`
}

/** '1 Dec 2026, 10:42 UTC'. */
export function formatDateTime(iso: string): string {
  const date = new Date(iso)
  const two = (value: number) => String(value).padStart(2, '0')
  return `${formatDate(iso)}, ${two(date.getUTCHours())}:${two(date.getUTCMinutes())} UTC`
}

/** A tick of a time axis, as fine as its span asks. */
export function formatTick(date: Date, spanDays: number): string {
  const two = (value: number) => String(value).padStart(2, '0')
  if (spanDays <= 2.5) return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${two(date.getUTCHours())}:${two(date.getUTCMinutes())}`
  if (spanDays <= 120) return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]}`
  return `${MONTHS[date.getUTCMonth()]} ${date.getUTCFullYear()}`
}
