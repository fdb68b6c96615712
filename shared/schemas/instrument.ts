import { z } from 'zod'
import type { CalibrationView } from './calibration'
import { idSchema, limitSchema, nameSchema, noteSchema } from './common'
import { type FilmWeighingInput, filmWeighingSchema } from './weighing'

export const constructionSchema = z.enum(['open', 'frame', 'double-headed', 'kettle', 'fixture'], 'Choose open, frame, double-headed, kettle or fixture.')
export const headSideSchema = z.enum(['batter', 'resonant'])
export const filmMaterialSchema = z.enum(['pet', 'skin', 'woven', 'other'])

const between = (low: number, high: number, what: string, unit: string) =>
  z.number(`${what} is a number${unit && ` in ${unit}`}.`).min(low, `${what} is at least ${low}${unit && ` ${unit}`}.`).max(high, `${what} is at most ${high}${unit && ` ${unit}`}.`)

export const filmSchema = z.object({
  material: filmMaterialSchema,
  /** Laminates of more than four plies are not made as drumheads (common practice, no source). */
  plies: between(1, 4, 'Plies', '').int('Plies is a whole number.'),
  /** 20 um is thinner than any drum film, 3 mm thicker than any skin. */
  thicknessUm: between(20, 3000, 'Thickness of one ply', 'µm'),
  densityKgM3: between(300, 3000, 'Film density', 'kg/m³'),
  modulusGPa: between(0.1, 200, 'Film modulus', 'GPa'),
  /** Thermodynamics bounds an isotropic solid at 0.5. */
  poisson: between(0, 0.49, 'Poisson ratio', ''),
  yieldMPa: between(1, 2000, 'Yield stress', 'MPa'),
})

export const headInputSchema = z.object({
  side: headSideSchema,
  filmId: z.string().max(60).nullish(),
  film: filmSchema,
  /** The whole head, coating included; overrides plies x thickness x density. */
  arealDensityKgM2: between(0.02, 5, 'Areal density', 'kg/m²').nullish(),
  /** What it may be off, 95 %. The least a good scale and a cut disc come to is near 0.05 %. */
  arealDensityU95KgM2: between(0.000_01, 2, 'Uncertainty of the areal density', 'kg/m²').nullish(),
  /** A piece of the film on the scale: then it decides the areal density and its uncertainty. */
  weighing: filmWeighingSchema.nullish(),
  coating: z.string().trim().max(60).nullish(),
})

const instrumentFields = z.object({
  name: nameSchema,
  construction: constructionSchema,
  /** From a 3 in hand drum to a concert bass drum of 60 in. */
  diameterMm: between(75, 1600, 'Vibrating diameter', 'mm'),
  /** What it may be off, 95 %. A caliper on a bearing edge does not repeat to better than 0.02 mm. */
  diameterU95Mm: between(0.02, 50, 'Uncertainty of the diameter', 'mm').nullish(),
  depthMm: between(0, 1600, 'Shell depth', 'mm'),
  bowlVolumeL: between(1, 600, 'Bowl volume', 'litres').nullish(),
  /** 24: the largest round that can be read rod by rod. */
  rodCount: between(3, 24, 'Rods', '').int('Rods is a whole number.'),
  threadPitchMm: between(0.3, 5, 'Thread pitch', 'mm'),
  hoop: z.string().trim().max(60).nullish(),
  note: noteSchema.nullish(),
  customerId: idSchema.nullish(),
})

export const instrumentBody = instrumentFields.extend({
  /** 12-24 UNC, the common drum rod: 1/24 in a turn (ASME B1.1). Stands here, not above: a patch must not bring it back. */
  threadPitchMm: instrumentFields.shape.threadPitchMm.default(1.058),
  heads: z.array(headInputSchema).min(1, 'Give the batter head at least.').max(2, 'A drum has at most two heads.'),
}).superRefine((drum, context) => {
  const issue = (path: (string | number)[], message: string) => context.addIssue({ code: 'custom', path, message })
  const sides = drum.heads.map(head => head.side)
  if (!sides.includes('batter')) issue(['heads'], 'Give the batter head.')
  if (new Set(sides).size !== sides.length) issue(['heads'], 'Each side carries one head.')
  if (drum.construction === 'double-headed' && !sides.includes('resonant')) issue(['heads'], 'A double-headed drum needs its resonant head too.')
  if (drum.construction !== 'double-headed' && sides.includes('resonant')) issue(['heads'], 'Only a double-headed drum has a resonant head.')
  if (drum.construction === 'kettle' && !drum.bowlVolumeL) issue(['bowlVolumeL'], 'A kettle needs its bowl volume in litres.')
  if ((drum.construction === 'open' || drum.construction === 'double-headed') && drum.depthMm <= 0) issue(['depthMm'], 'This construction needs a shell depth.')
})
export type InstrumentBody = z.infer<typeof instrumentBody>
export type InstrumentInput = z.input<typeof instrumentBody>

/** What diameter (by tape) and areal density (by data sheet) are taken to be off where nobody measured, 95 %, as a share. */
export const USUAL_U95 = { diameter: 0.002, arealDensity: 0.02 }

export const instrumentPatchBody = instrumentFields.omit({ construction: true }).partial()
export type InstrumentPatchBody = z.infer<typeof instrumentPatchBody>

/** New film on a head, unless it is the same film better known: what was learned of its rods is forgotten. */
export const headPatchBody = headInputSchema.omit({ side: true }).extend({ sameFilm: z.boolean().default(false) })
export type HeadPatchBody = z.infer<typeof headPatchBody>
export const headParams = z.object({ headId: idSchema })

export const instrumentQuery = z.object({
  limit: limitSchema.default(50),
  q: z.string().trim().max(100, 'Search with at most 100 characters.').optional(),
  cursor: z.string().max(200).optional(),
})
export type InstrumentQuery = z.infer<typeof instrumentQuery>

export interface HeadView {
  id: string
  side: 'batter' | 'resonant'
  filmId: string | null
  film: z.infer<typeof filmSchema>
  arealDensityKgM2: number
  /** 95 %; null: taken for USUAL_U95. */
  arealDensityU95KgM2: number | null
  weighing: FilmWeighingInput | null
  coating: string | null
  calibration: CalibrationView | null
  /** What applied turn sheets taught of this head's rods; null before the first. */
  learned: { kappa: number, passes: number } | null
}

export interface InstrumentView {
  id: string
  code: string
  name: string
  construction: z.infer<typeof constructionSchema>
  diameterMm: number
  /** 95 %; null: taken for USUAL_U95. */
  diameterU95Mm: number | null
  depthMm: number
  bowlVolumeL: number | null
  rodCount: number
  threadPitchMm: number
  hoop: string | null
  note: string | null
  customerId: string | null
  customerName: string | null
  createdAt: string
  heads: HeadView[]
  /** The newest reading of any head, for lists. */
  lastReading: { id: string, takenAt: string, side: 'batter' | 'resonant', tensionNPerM: number, fundamentalHz: number } | null
}

export interface InstrumentsPage { items: InstrumentView[], total: number, next: string | null }

/** A film of the catalogue. */
export interface FilmView extends z.infer<typeof filmSchema> {
  id: string
  name: string
  arealDensityKgM2: number
  coating: string | null
}

/** All readings and turns of an instrument's heads, oldest first. */
export interface InstrumentHistoryView {
  readings: {
    id: string
    recordingId: string
    takenAt: string
    headId: string
    side: 'batter' | 'resonant'
    strike: 'centre' | 'edge' | 'round'
    tension: { nPerM: number, u95NPerM: number }
    fundamentalHz: number
    evennessPercent: number | null
    temperatureC: number
    doubtful: boolean
    makerName: string | null
  }[]
  turns: {
    id: string
    headId: string
    side: 'batter' | 'resonant'
    readingId: string
    nextReadingId: string | null
    appliedAt: string
    meanTurns: number
    predictedTensionNPerM: number
    byName: string | null
  }[]
}
