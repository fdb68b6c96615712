import { describe, expect, it } from 'vitest'
import { airAt, createDrumModel } from '../../../shared/acoustics'
import { anchorPitch } from '../../../server/utils/turns/pitch'
import { film, tomModel } from './situations'

describe('pitch anchored to a reading', () => {
  const measuredHz = 1.02 * tomModel.fundamentalHz(2400)
  const pitch = anchorPitch(tomModel, { tensionNPerM: 2400, fundamentalHz: measuredHz })

  it('gives back what was measured at the reading\'s own tension', () => {
    expect(pitch.fundamentalHz(2400)).toBeCloseTo(measuredHz, 9) // the anchor is exact but for rounding
  })

  it('finds the tension of a pitch, and that pitch again from it', () => {
    const tension = pitch.tensionFor(1.1 * measuredHz, 'fundamental')
    expect(pitch.fundamentalHz(tension)).toBeCloseTo(1.1 * measuredHz, 6) // bisection ends below 1e-9 of the tension
    // Rayleigh: pitch goes with the root of tension. 3 %: the air's mass follows the frequency a little.
    expect(tension / 2400 / 1.21).toBeGreaterThan(0.97)
    expect(tension / 2400 / 1.21).toBeLessThan(1.03)
  })

  it('says where a pitch lies beyond the head', () => {
    expect(() => pitch.tensionFor(2000, 'fundamental')).toThrowError(/cannot reach 2000\.0 Hz: it sounds between \d+ and \d+ Hz/)
  })

  it('takes a kettle by its principal tone when asked', () => {
    const kettle = createDrumModel({ geometry: { construction: 'kettle', radiusM: 0.33, depthM: 0, bowlVolumeM3: 0.14 }, film, air: airAt({ temperatureC: 20 }) })
    const tuned = anchorPitch(kettle, { tensionNPerM: 4000, fundamentalHz: kettle.fundamentalHz(4000), principalHz: 140 })
    expect(tuned.principalHz(4000)).toBeCloseTo(140, 9) // the anchor is exact but for rounding
    expect(tuned.tensionFor(150, 'principal')).toBeGreaterThan(4000)
  })

  it.each([[2000, 1500, 1], [1500, 2000, 1], [2000, 2000, 1.5], [3000, 1200, 2]])('follows the mode that was heard on two heads at %f and %f N/m without a jump', (tension, other, ratio) => {
    const drum = createDrumModel({ geometry: { construction: 'double-headed', radiusM: 0.1524, depthM: 0.2 }, film, air: airAt({ temperatureC: 20 }) })
    const lowest = drum.predictModes({ tensionNPerM: tension, otherTensionNPerM: other, nodalDiameters: [0] })[0]!.frequencyHz
    const tuned = anchorPitch(drum, { tensionNPerM: tension, fundamentalHz: ratio * lowest }, other)
    let before = 0
    for (let t = tension / 2; t <= 2 * tension; t *= 1.02) {
      const hz = tuned.fundamentalHz(t)
      expect(hz).toBeGreaterThan(before)
      // Rayleigh's quotient bounds the rise of any mode by that of the root of tension, 1 % for 2 %; 0.1 % more for the air's inertia.
      if (before) expect(hz / before).toBeLessThan(1.011)
      before = hz
    }
  })
})
