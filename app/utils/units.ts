import { fixed, withUnit } from './figures'

/** What a person chose to see (stores/preferences.ts). */
export type UnitSystem = 'trade' | 'si'

const MM_PER_INCH = 25.4
const UM_PER_MIL = 25.4

/** A measure that a form may show in more than one unit; the value itself is always the first unit's. */
export interface Measure {
  /** Units offered, the stored one first. `perStored` is how many of this unit make one stored unit. */
  units: readonly { name: string, perStored: number, decimals: number }[]
  trade: string
  si: string
}

export const LENGTH: Measure = {
  units: [{ name: 'mm', perStored: 1, decimals: 1 }, { name: 'in', perStored: 1 / MM_PER_INCH, decimals: 3 }],
  trade: 'in',
  si: 'mm',
}
export const THICKNESS: Measure = {
  units: [{ name: '\u00B5m', perStored: 1, decimals: 0 }, { name: 'mil', perStored: 1 / UM_PER_MIL, decimals: 2 }],
  trade: 'mil',
  si: '\u00B5m',
}

/** How far off a length may be. */
export const LENGTH_ERROR: Measure = {
  units: [{ name: 'mm', perStored: 1, decimals: 2 }, { name: 'in', perStored: 1 / MM_PER_INCH, decimals: 4 }],
  trade: 'in',
  si: 'mm',
}
/** Pieces of film are cut by the millimetre or by the inch. */
export const MASS: Measure = {
  units: [{ name: 'g', perStored: 1, decimals: 3 }, { name: 'oz', perStored: 1 / 28.349_523, decimals: 4 }],
  trade: 'g',
  si: 'g',
}

/** Advance of a rod in one turn; trade threads are counted in turns per inch, which is no linear unit, so mm and in stand. */
export const THREAD: Measure = {
  units: [{ name: 'mm', perStored: 1, decimals: 3 }, { name: 'in', perStored: 1 / MM_PER_INCH, decimals: 4 }],
  trade: 'mm',
  si: 'mm',
}

/** Without the zeros that say nothing: 14, 13.75. */
function trimmed(value: number, decimals: number): string {
  return fixed(Number(value.toFixed(decimals)), decimals).replace(/(\.\d*?)0+$/, '$1').replace(/\.$/, '')
}

/** Stored value to the text of a field in the chosen unit. */
export function toField(measure: Measure, unit: string, stored: number): string {
  const { perStored, decimals } = measure.units.find(entry => entry.name === unit) ?? measure.units[0]!
  return trimmed(stored * perStored, decimals)
}

/** The text of a field to the stored unit; undefined when it is no number. A decimal comma counts as a point. */
export function fromField(measure: Measure, unit: string, text: string): number | undefined {
  const value = Number(text.trim().replace(',', '.').replace('\u2212', '-'))
  if (text.trim() === '' || !Number.isFinite(value)) return undefined
  const { perStored } = measure.units.find(entry => entry.name === unit) ?? measure.units[0]!
  return value / perStored
}

/** @param decimals of inches: a bearing edge is known to 0.01 in, a shell's depth to 0.1 in */
export function formatLength(mm: number, units: UnitSystem, decimals = 2): string {
  return units === 'trade' ? withUnit(trimmed(mm / MM_PER_INCH, decimals), 'in') : withUnit(fixed(mm), 'mm')
}

export function formatThickness(um: number, units: UnitSystem): string {
  return units === 'trade' ? withUnit(trimmed(um / UM_PER_MIL, 1), 'mil') : withUnit(fixed(um), '\u00B5m')
}
