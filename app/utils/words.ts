import { formatThickness, type UnitSystem } from './units'

/** Trade words for the values that the API keeps. */
export const CONSTRUCTIONS = [
  { value: 'open', label: 'Open shell', text: 'One head on a shell that is open at the far end.' },
  { value: 'frame', label: 'Frame', text: 'A shallow ring, air free on both sides.' },
  { value: 'double-headed', label: 'Double-headed', text: 'Batter and resonant head on one shell.' },
  { value: 'kettle', label: 'Kettle', text: 'One head over a closed bowl.' },
  { value: 'fixture', label: 'Proof fixture', text: 'A head flush in a wide board, air on both sides.' },
] as const
export type ConstructionValue = typeof CONSTRUCTIONS[number]['value']

export const MATERIALS = [
  { value: 'pet', label: 'PET' },
  { value: 'skin', label: 'Natural skin' },
  { value: 'woven', label: 'Woven' },
  { value: 'other', label: 'Other' },
] as const

export function constructionName(value: string): string {
  return CONSTRUCTIONS.find(entry => entry.value === value)?.label ?? value
}

/** The heads of a drum as choices of one of them. */
export function headChoices<Side extends string>(heads: readonly { side: Side }[] | undefined): { value: Side, label: string }[] {
  return (heads ?? []).map(({ side }) => ({ value: side, label: side === 'batter' ? 'Batter side' : 'Resonant side' }))
}

/** 'PET, single ply, 250 um'. */
export function filmName(film: { material: string, plies: number, thicknessUm: number }, units: UnitSystem): string {
  const material = MATERIALS.find(entry => entry.value === film.material)?.label ?? film.material
  const plies = film.plies === 1 ? 'single ply' : film.plies === 2 ? 'two-ply' : `${film.plies} plies`
  return `${material}, ${plies}, ${film.plies > 1 ? `${film.plies}\u2009\u00D7\u2009` : ''}${formatThickness(film.thicknessUm, units)}`
}

export function strikeName(strike: string, tapCount: number, rod?: number | null): string {
  if (strike === 'round') return `a round of ${tapCount}`
  if (strike === 'edge') return rod ? `edge tap at rod ${rod}` : 'edge tap'
  return 'centre tap'
}
