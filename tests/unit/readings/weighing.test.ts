import { describe, expect, it } from 'vitest'
import { INPUT_UNCERTAINTY } from '../../../server/utils/analysis/matchingPriors'
import { USUAL_U95 } from '../../../shared/schemas/instrument'
import { filmWeighingSchema, weighedDensity } from '../../../shared/schemas/weighing'

const disc = { shape: 'disc' as const, massG: 24.56, massU95G: 0.1, sizeMm: 300, sizeU95Mm: 0.5 }

describe('a weighed piece of film', () => {
  it('gives its mass over its area, with what scale and scissors leave open', () => {
    const { arealDensityKgM2, u95KgM2 } = weighedDensity(disc)
    expect(arealDensityKgM2).toBeCloseTo(0.02456 / (Math.PI * 0.15 ** 2), 12) // the same arithmetic by the circle's radius
    // 0.1 g of 24.56 g and twice 0.5 mm of 300 mm, in squares (JCGM 100:2008, 5.1.6): 0.526 %.
    expect(u95KgM2 / arealDensityKgM2).toBeCloseTo(Math.hypot(0.1 / 24.56, 2 * 0.5 / 300), 10) // exact but for rounding
  })

  it('counts a strip by its length and width', () => {
    const { arealDensityKgM2, u95KgM2 } = weighedDensity({ shape: 'strip', massG: 3.475, massU95G: 0.02, sizeMm: 200, widthMm: 50, sizeU95Mm: 0.4 })
    expect(arealDensityKgM2).toBeCloseTo(0.3475, 12) // 3.475 g on 0.01 m2
    expect(u95KgM2 / arealDensityKgM2).toBeCloseTo(Math.hypot(0.02 / 3.475, 0.4 / 200, 0.4 / 50), 10) // each side's share of the area, in squares
  })

  it('needs a mass, a size, and a strip its width', () => {
    expect(filmWeighingSchema.safeParse(disc).success).toBe(true)
    expect(filmWeighingSchema.safeParse({ ...disc, massG: Number.NaN }).success).toBe(false)
    expect(filmWeighingSchema.safeParse({ ...disc, shape: 'strip' }).error?.issues[0]?.path).toEqual(['widthMm'])
  })
})

describe('what the forms show as usual', () => {
  it('is what the analysis takes where nothing was measured', () => {
    // 5 %: the forms show 0.2 % and 2 %, rounded from 1.96 standard uncertainties.
    expect(Math.abs(USUAL_U95.diameter / (1.96 * INPUT_UNCERTAINTY.radius) - 1)).toBeLessThan(0.05)
    expect(Math.abs(USUAL_U95.arealDensity / (1.96 * INPUT_UNCERTAINTY.arealDensity) - 1)).toBeLessThan(0.05) // as above
  })
})
