import { z } from 'zod'
import { arealDensityByWeighing } from '../acoustics/weighing'

const within = (low: number, high: number, what: string, unit: string) =>
  z.number(`${what} is a number in ${unit}.`).min(low, `${what} is at least ${low} ${unit}.`).max(high, `${what} is at most ${high} ${unit}.`)

/** What was put on the scale: a disc or a strip cut from the same film. All uncertainties are 95 %. */
export const filmWeighingSchema = z.object({
  shape: z.enum(['disc', 'strip'], 'Choose disc or strip.'),
  /** 0.05 g is less than a postage stamp of the thinnest film; 5 kg more than the largest skin. */
  massG: within(0.05, 5000, 'The mass', 'g'),
  massU95G: within(0.0001, 500, 'What the scale may be off', 'g'),
  /** A disc's diameter or a strip's length. */
  sizeMm: within(10, 2000, 'The size', 'mm'),
  /** A strip's width. */
  widthMm: within(5, 2000, 'The width', 'mm').nullish(),
  sizeU95Mm: within(0.005, 50, 'What the cut may be off', 'mm'),
}).superRefine((weighing, context) => {
  if (weighing.shape === 'strip' && !weighing.widthMm) context.addIssue({ code: 'custom', path: ['widthMm'], message: 'A strip needs its width.' })
})
export type FilmWeighingInput = z.infer<typeof filmWeighingSchema>

/** 95 % of a normal distribution lie within this many standard deviations. Source: JCGM 100:2008, table G.1. */
export const COVERAGE_95 = 1.96

/**
 * Areal density of a weighed piece with its 95 % uncertainty, kg/m2. A strip counts as the disc of the same area and the
 * same relative uncertainty of it.
 */
export function weighedDensity({ shape, massG, massU95G, sizeMm, widthMm, sizeU95Mm }: FilmWeighingInput): { arealDensityKgM2: number, u95KgM2: number } {
  const disc = shape === 'disc' || !widthMm
  const diameterMm = disc ? sizeMm : Math.sqrt(4 * sizeMm * widthMm / Math.PI)
  const areaShare = disc ? 2 * sizeU95Mm / sizeMm : Math.hypot(sizeU95Mm / sizeMm, sizeU95Mm / widthMm)
  const { arealDensityKgM2, relative } = arealDensityByWeighing({
    massKg: massG / 1000, massStandardKg: massU95G / 1000 / COVERAGE_95,
    cutDiameterM: diameterMm / 1000, cutDiameterStandardM: areaShare / 2 * diameterMm / 1000 / COVERAGE_95,
  })
  return { arealDensityKgM2, u95KgM2: COVERAGE_95 * relative * arealDensityKgM2 }
}
