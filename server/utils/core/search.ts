/**
 * Pattern for `ilike` that finds a text anywhere: % and _ are letters like others. NUL goes, because PostgreSQL refuses
 * it in a parameter.
 */
export function containsPattern(text: string): string {
  return `%${text.replaceAll('\0', '').replace(/[\\%_]/g, '\\$&')}%`
}
