import { describe, expect, it } from 'vitest'
import { explainLines } from '../../../server/utils/analysis/matching'
import { calibrate } from '../../../server/utils/analysis/matchingCalibration'
import { findingsOf, requestOf, type LineCase } from './matching.support'

/** A drum whose air and edge are each one standard deviation and more off what is assumed. */
const drum: LineCase = { construction: 'open', tensionNPerM: 3000, x0: 0.6, seed: 5, airScale: { axisymmetric: 1.08, others: 0.97 }, edgeFactor: 0.3 }
const known = { value: 3000, standard: 6 }
const request = requestOf(drum)
const calibration = calibrate({ modes: explainLines(findingsOf(drum), request).modes, request, tensionNPerM: known })
const readAt = (tensionNPerM: number, seed: number, instrument = request.instrument) => explainLines(findingsOf({ ...drum, tensionNPerM, seed }), { ...request, instrument })

describe('a calibration at a known tension', () => {
  it('finds the air within its stated uncertainty', () => {
    const { airScaleAxisymmetric: low, airScaleOthers: others } = calibration
    expect(Math.abs(low.value - 1.08)).toBeLessThan(2 * low.standard) // two standard deviations
    expect(Math.abs(others.value - 0.97)).toBeLessThan(2 * others.standard) // the same
    expect(low.standard).toBeLessThan(0.05) // half of what an open shell's is without: 0.1
  })

  it.each([[2000, 21], [3000, 22], [4500, 23]])('narrows the reading of the same head at %d N/m to a third, and holds the truth', (tension, seed) => {
    const plain = readAt(tension, seed)
    const calibrated = readAt(tension, seed, { ...request.instrument, calibration })
    expect(calibrated.tension.u95NPerM / plain.tension.u95NPerM).toBeLessThan(0.4) // what remains is the known tension's 0.2 %, modulus and noise, against air, edge, mass and diameter
    expect(Math.abs(calibrated.tension.nPerM - tension)).toBeLessThan(1.5 * calibrated.tension.u95NPerM) // three standard deviations
    expect(calibrated.budget.map(part => part.name)).toContain('calibration')
    expect(calibrated.budget.map(part => part.name)).not.toContain('areal density')
  })

  it('is refused where the tension is not known', () => {
    expect(() => calibrate({ modes: [], request, tensionNPerM: known })).toThrow(RangeError)
    expect(() => calibrate({ modes: [], request, tensionNPerM: { value: 3000, standard: 0 } })).toThrow(RangeError)
  })
})

describe('figures that the maker measured better', () => {
  it('narrow their own lines of the budget and the whole', () => {
    const plain = readAt(3000, 31)
    const measured = readAt(3000, 31, { ...request.instrument, uncertainty: { diameterMm: 0.05, arealDensityRelative: 0.002 } })
    const line = (reading: typeof plain, name: string) => reading.budget.find(part => part.name === name)!
    // 0.05 mm on 330 mm for 0.33 mm, and 0.2 % for 1 %: a sixth and a fifth; the other unknowns take up a little.
    expect(line(measured, 'diameter').standardNPerM / line(plain, 'diameter').standardNPerM).toBeLessThan(0.25)
    expect(line(measured, 'areal density').standardNPerM / line(plain, 'areal density').standardNPerM).toBeLessThan(0.3) // as above
    expect(measured.tension.u95NPerM / plain.tension.u95NPerM).toBeLessThan(0.75) // mass was the largest part
    expect(line(measured, 'areal density').source).toContain('scale')
  })
})
