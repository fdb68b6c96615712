import { nearestNote } from '#shared/acoustics/notes'

/** U+2009, between a figure and its unit. */
export const THIN = '\u2009'
export const MINUS = '\u2212'
export const PLUS_MINUS = '\u00B1'

/** A number with fixed decimals, a true minus, and no minus before a zero. */
export function fixed(value: number, decimals = 0): string {
  const text = value.toFixed(decimals)
  return Number(text) === 0 ? text.replace('-', '') : text.replace('-', MINUS)
}

/** The same with its sign always shown, as deviations and turns need. */
export function signed(value: number, decimals = 0): string {
  const text = fixed(value, decimals)
  return Number(value.toFixed(decimals)) > 0 ? `+${text}` : text
}

export function withUnit(text: string, unit: string): string {
  return `${text}${THIN}${unit}`
}

/**
 * The place to which a figure with this expanded uncertainty is worth writing: two digits of an uncertainty from 10 on
 * or starting with 1 or 2, else one. GUM (JCGM 100:2008) 7.2.6: at most two significant digits.
 */
export function placeOf(uncertainty: number): { step: number, decimals: number } {
  if (!(uncertainty > 0) || !Number.isFinite(uncertainty)) return { step: 0.1, decimals: 1 }
  const exponent = Math.floor(Math.log10(uncertainty))
  const lead = uncertainty / 10 ** exponent
  const digits = uncertainty >= 10 || lead < 2.95 ? 2 : 1
  const power = exponent - digits + 1
  return { step: 10 ** power, decimals: Math.max(0, -power) }
}

/** A figure cut to what its uncertainty supports. */
export function figure(value: number, uncertainty: number): string {
  const { step, decimals } = placeOf(uncertainty)
  return fixed(step >= 1 ? Math.round(value / step) * step : value, decimals)
}

/** '3120 +- 62' without its unit. */
export function figureWithUncertainty(value: number, uncertainty: number): string {
  return `${figure(value, uncertainty)}${THIN}${PLUS_MINUS}${THIN}${figure(uncertainty, uncertainty)}`
}

/** 'C#3' with the musical sharp. */
export function noteName(name: string): string {
  return name.replaceAll('#', '\u266F')
}

/** 'D3 -54 cents'; the bare name when the pitch is on the note to the cent. */
export function noteWithCents(frequencyHz: number): string {
  const note = nearestNote(frequencyHz)
  const cents = Math.round(note.cents)
  return cents === 0 ? noteName(note.name) : `${noteName(note.name)} ${signed(cents)} cents`
}

/** Standard name of a mode, '(0,1)'. */
export function modeName(mode: { m: number, n: number }): string {
  return `(${mode.m},${mode.n})`
}

/** '1 rod', '8 rods'. */
export function count(number: number, one: string, many = `${one}s`): string {
  return `${number} ${number === 1 ? one : many}`
}
