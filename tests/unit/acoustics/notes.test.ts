import { describe, expect, it } from 'vitest'
import { bareArealDensityKgM2, bendingStiffnessNm, centsBetween, filmStress, nearestNote, parseNote, parseNoteHz, tensionPerTurnNPerM } from '../../../shared/acoustics'

describe('notes', () => {
  it('have the frequencies of equal temperament', () => {
    // Source: ISO 16:1975 (A4 = 440 Hz); others from 2^(n/12), printed in any table of equal temperament to two decimals.
    expect(parseNoteHz('A4')).toBe(440)
    expect(parseNoteHz('C4')).toBeCloseTo(261.63, 2) // two printed decimals
    expect(parseNoteHz('D3')).toBeCloseTo(146.83, 2) // two printed decimals
    expect(parseNoteHz('A2')).toBeCloseTo(110, 9) // two octaves below: exact
  })

  it('are read in every common spelling', () => {
    expect(parseNote('C#4')).toBe(61)
    expect(parseNote('c\u266f4')).toBe(61)
    expect(parseNote('Db4')).toBe(61)
    expect(parseNote('Bb2')).toBe(46)
    expect(parseNote(' B\u266d2 ')).toBe(46)
    expect(parseNote('Cb4')).toBe(59)
    expect(parseNote('B#3')).toBe(60)
    expect(parseNote('F##2')).toBe(43)
    expect(parseNote('C-1')).toBe(0)
  })

  it('are not read from other words', () => {
    for (const text of ['', 'H3', 'D', '146 Hz', 'Bb', 'D33', 'A4x']) expect(parseNote(text)).toBeUndefined()
  })

  it('are named with their distance in cents', () => {
    expect(nearestNote(440)).toMatchObject({ name: 'A4', number: 69, cents: 0 })
    const sharp = nearestNote(146.832 * 2 ** (0.2 / 12))
    expect(sharp.name).toBe('D3')
    expect(sharp.cents).toBeCloseTo(20, 1) // D3 = 146.832 Hz has six printed digits: 0.01 cent
    expect(nearestNote(8.2).name).toBe('C-1')
    expect(centsBetween(100, 200)).toBe(1200)
    expect(() => nearestNote(0)).toThrow(RangeError)
  })
})

describe('film', () => {
  const film = { plies: 2, plyThicknessM: 180e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.5 }

  it('bends as the sum of its sliding plies', () => {
    const one = { ...film, plies: 1 }
    expect(bendingStiffnessNm(film)).toBeCloseTo(2 * bendingStiffnessNm(one), 12) // plies slide: twice, not eight times
    expect(bendingStiffnessNm(one)).toBeCloseTo(4.5e9 * 180e-6 ** 3 / (12 * (1 - 0.38 ** 2)), 12) // Source: Timoshenko & Woinowsky-Krieger ch. 1
  })

  it('is stressed over all its plies', () => {
    expect(filmStress(film, 3600).stressPa).toBeCloseTo(10e6, 3) // 3600 N/m over 360 um: 10 MPa
    expect(filmStress(film, 3600).shareOfYield).toBeCloseTo(0.1, 9) // of 100 MPa
    expect(bareArealDensityKgM2(film)).toBeCloseTo(0.5004, 9) // 2 * 180 um * 1390
  })

  it('tightens by what a full turn stretches it', () => {
    const turn = { film: { ...film, plies: 1, plyThicknessM: 250e-6 }, radiusM: 0.165, threadPitchM: 1.058e-3, kappa: 1 }
    // Strain pitch/R in all directions: E h / (1 - nu) * 1.058e-3 / 0.165 = 11 635 N/m. Source: plane stress, Timoshenko & Goodier ch. 4.
    expect(tensionPerTurnNPerM(turn)).toBeCloseTo(11635, 0) // worked by hand to five digits
    expect(tensionPerTurnNPerM({ ...turn, kappa: 0.5 })).toBeCloseTo(11635 / 2, 0) // in proportion to kappa
    expect(() => tensionPerTurnNPerM({ ...turn, kappa: 1.2 })).toThrow(RangeError)
  })
})
