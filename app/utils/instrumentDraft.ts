import type { FilmView, HeadView, InstrumentInput, InstrumentView } from '#shared/schemas/instrument'
import type { FilmWeighingInput } from '#shared/schemas/weighing'
import type { ConstructionValue } from './words'

/** 1/24 in, the pitch of a 12-24 UNC rod (ASME B1.1). */
const UNC_12_24_PITCH_MM = 1.058
/** 1/20 in, the pitch of a 1/4-20 UNC rod (ASME B1.1), on larger drums. */
const UNC_QUARTER_20_PITCH_MM = 1.27

export interface HeadDraft {
  side: 'batter' | 'resonant'
  filmId: string
  material: 'pet' | 'skin' | 'woven' | 'other'
  plies: number | null
  thicknessUm: number | null
  densityKgM3: number | null
  modulusGPa: number | null
  poisson: number | null
  yieldMPa: number | null
  arealDensityKgM2: number | null
  /** 95 %; null: a data sheet's. */
  arealDensityU95KgM2: number | null
  weighing: FilmWeighingInput | null
  coating: string
  /** Of a head that is there already: whether changed figures are of the same film. Null: as the change suggests. */
  sameFilm: boolean | null
}

export interface InstrumentDraft {
  name: string
  construction: ConstructionValue
  diameterMm: number | null
  /** 95 %; null: a tape's. */
  diameterU95Mm: number | null
  depthMm: number | null
  bowlVolumeL: number | null
  rodCount: number | null
  threadPitchMm: number | null
  hoop: string
  note: string
  customerId: string | null
  heads: HeadDraft[]
}

/** Sizes most often built of each construction (common practice, no source); every figure can be changed. */
const START: Record<ConstructionValue, { diameterMm: number, depthMm: number, rodCount: number, threadPitchMm: number }> = {
  'open': { diameterMm: 355.6, depthMm: 203, rodCount: 8, threadPitchMm: UNC_12_24_PITCH_MM },
  'frame': { diameterMm: 355.6, depthMm: 64, rodCount: 6, threadPitchMm: UNC_12_24_PITCH_MM },
  'double-headed': { diameterMm: 355.6, depthMm: 355.6, rodCount: 8, threadPitchMm: UNC_12_24_PITCH_MM },
  'kettle': { diameterMm: 660.4, depthMm: 0, rodCount: 8, threadPitchMm: UNC_QUARTER_20_PITCH_MM },
  'fixture': { diameterMm: 330.2, depthMm: 0, rodCount: 8, threadPitchMm: UNC_12_24_PITCH_MM },
}

/** Bowl close to half an ellipsoid as deep as 0.55 of its width: 2/3 pi R^2 * depth, litres. */
export function bowlVolumeL(diameterMm: number): number {
  const radiusDm = diameterMm / 200
  return Math.round(2 / 3 * Math.PI * radiusDm ** 2 * (1.1 * radiusDm))
}

/** Rods by size: one about each 11 to 13 cm of rim, in even numbers (common practice, no source). */
export function usualRods(diameterMm: number): number {
  return Math.min(12, Math.max(5, 2 * Math.round(Math.PI * diameterMm / 135 / 2)))
}

export function usualDepthMm(construction: ConstructionValue, diameterMm: number): number {
  if (construction === 'kettle' || construction === 'fixture') return 0
  if (construction === 'frame') return 64
  return Math.round(diameterMm * (construction === 'double-headed' ? 0.8 : 0.55))
}

export function emptyHead(side: HeadDraft['side']): HeadDraft {
  return { side, filmId: '', material: 'pet', plies: 1, thicknessUm: null, densityKgM3: null, modulusGPa: null, poisson: null, yieldMPa: null, arealDensityKgM2: null, arealDensityU95KgM2: null, weighing: null, coating: '', sameFilm: null }
}

/** The catalogue's film, figure by figure, into a head. */
export function takeFilm(head: HeadDraft, film: FilmView): void {
  Object.assign(head, {
    filmId: film.id, material: film.material, plies: film.plies, thicknessUm: film.thicknessUm, densityKgM3: film.densityKgM3,
    modulusGPa: film.modulusGPa, poisson: film.poisson, yieldMPa: film.yieldMPa, arealDensityKgM2: film.arealDensityKgM2, arealDensityU95KgM2: null, weighing: null, coating: film.coating ?? '',
  })
}

export function startDraft(construction: ConstructionValue, films: readonly FilmView[]): InstrumentDraft {
  const start = START[construction]
  const draft: InstrumentDraft = {
    ...start, diameterU95Mm: null, name: '', construction, bowlVolumeL: construction === 'kettle' ? bowlVolumeL(start.diameterMm) : null, hoop: '', note: '', customerId: null,
    heads: (construction === 'double-headed' ? ['batter', 'resonant'] as const : ['batter'] as const).map(emptyHead),
  }
  for (const head of draft.heads) {
    const film = usualFilm(films, head.side)
    if (film) takeFilm(head, film)
  }
  return draft
}

/** One ply of PET near 250 um for a batter, the thinnest for a resonant side (common practice, no source). */
export function usualFilm(films: readonly FilmView[], side: HeadDraft['side']): FilmView | undefined {
  const single = films.filter(film => film.material === 'pet' && film.plies === 1)
  const wanted = side === 'batter' ? 250 : 190
  return [...single].sort((a, b) => Math.abs(a.thicknessUm - wanted) - Math.abs(b.thicknessUm - wanted))[0] ?? films[0]
}

export function headDraftOf(head: HeadView): HeadDraft {
  return { side: head.side, filmId: head.filmId ?? '', ...head.film, arealDensityKgM2: head.arealDensityKgM2, arealDensityU95KgM2: head.arealDensityU95KgM2, weighing: head.weighing, coating: head.coating ?? '', sameFilm: null }
}

export function draftOf(instrument: InstrumentView): InstrumentDraft {
  const { name, construction, diameterMm, diameterU95Mm, depthMm, bowlVolumeL, rodCount, threadPitchMm, customerId } = instrument
  return { name, construction, diameterMm, diameterU95Mm, depthMm, bowlVolumeL, rodCount, threadPitchMm, customerId, hoop: instrument.hoop ?? '', note: instrument.note ?? '', heads: instrument.heads.map(headDraftOf) }
}

/** As the route takes it; an empty number becomes NaN so that the schema says what is missing. */
export function bodyOfHead(head: HeadDraft): InstrumentInput['heads'][number] {
  const number = (value: number | null) => value ?? Number.NaN
  return {
    side: head.side,
    filmId: head.filmId || null,
    film: {
      material: head.material, plies: number(head.plies), thicknessUm: number(head.thicknessUm), densityKgM3: number(head.densityKgM3),
      modulusGPa: number(head.modulusGPa), poisson: number(head.poisson), yieldMPa: number(head.yieldMPa),
    },
    arealDensityKgM2: head.arealDensityKgM2,
    arealDensityU95KgM2: head.arealDensityU95KgM2,
    weighing: head.weighing,
    coating: head.coating || null,
  }
}

export function bodyOf(draft: InstrumentDraft): InstrumentInput {
  const number = (value: number | null) => value ?? Number.NaN
  return {
    name: draft.name, construction: draft.construction, diameterMm: number(draft.diameterMm), diameterU95Mm: draft.diameterU95Mm, depthMm: number(draft.depthMm),
    bowlVolumeL: draft.construction === 'kettle' ? draft.bowlVolumeL : null, rodCount: number(draft.rodCount), threadPitchMm: number(draft.threadPitchMm),
    hoop: draft.hoop || null, note: draft.note || null, customerId: draft.customerId || null, heads: draft.heads.map(bodyOfHead),
  }
}

/** Whether a head's changed figures are of the same film: what it is made of and how thick it is stays, its mass is better known. */
export function looksLikeSameFilm(before: HeadDraft, now: HeadDraft): boolean {
  return (['material', 'plies', 'thicknessUm', 'coating'] as const).every(field => before[field] === now[field])
}
