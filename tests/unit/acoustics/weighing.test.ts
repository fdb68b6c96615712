import { describe, expect, it } from 'vitest'
import { arealDensityByWeighing } from '../../../shared/acoustics'

describe('a weighed film', () => {
  it('has the areal density of its mass over its area', () => {
    // By hand: 250 um PET of 1390 kg/m3 is 347.5 g/m2; a disc of 0.4 m, 0.125664 m2, weighs 43.668 g.
    const { arealDensityKgM2 } = arealDensityByWeighing({ massKg: 0.043668, massStandardKg: 0, cutDiameterM: 0.4, cutDiameterStandardM: 0 })
    expect(arealDensityKgM2).toBeCloseTo(0.3475, 5) // the digits of the mass above
  })

  it('is uncertain by the scale, and twice by the cut', () => {
    // JCGM 100:2008, 5.1.6: relative variances of a product of powers add with the powers squared: 0.3 % and 2 x 0.2 % give 0.5 %.
    const weighed = arealDensityByWeighing({ massKg: 0.05, massStandardKg: 0.00015, cutDiameterM: 0.4, cutDiameterStandardM: 0.0008 })
    expect(weighed.relative).toBeCloseTo(0.005, 9) // 3-4-5: exact but for rounding
    expect(weighed.standardKgM2 / weighed.arealDensityKgM2).toBeCloseTo(weighed.relative, 12) // the definition; rounding
  })

  it('is refused without mass or diameter', () => {
    expect(() => arealDensityByWeighing({ massKg: 0, massStandardKg: 0, cutDiameterM: 0.4, cutDiameterStandardM: 0 })).toThrow(RangeError)
    expect(() => arealDensityByWeighing({ massKg: 0.05, massStandardKg: -1, cutDiameterM: 0.4, cutDiameterStandardM: 0 })).toThrow(RangeError)
  })
})
