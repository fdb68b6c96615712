/**
 * Real kettledrums: notes 40 to 53 of the General MIDI kettledrum (program 48 of the list, index 47) as Debian's
 * fluid-soundfont-gm plays them. What was found in them by hand, with an interpolated FFT outside this project: the
 * principal tone (1,1) lies 0 to 50 cents above the named note, (2,1) : (1,1) is 1.46 to 1.51 and (3,1) : (1,1) 1.92 to 2.00.
 */
import { beforeAll, describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import type { AnalysedInstrument, AnalysedReading } from '../../../server/utils/analysis/types'
import { renderNote, requirePackages } from './soundfont'

const KETTLEDRUM = 47

/**
 * A 26 in kettle, whose usual range covers these notes, a bowl of 1.1 pi R^3 and a film of 210 um: nobody knows the drum
 * that was recorded. Of the films tried (190 to 250 um) this one fits every note: with 190 um at least twelve of the fourteen
 * are named alike and the other, note 47, is marked doubtful.
 */
const RADIUS_M = 26 * 0.0254 / 2
const KETTLE: AnalysedInstrument = {
  construction: 'kettle',
  radiusM: RADIUS_M,
  depthM: 0,
  bowlVolumeM3: 1.1 * Math.PI * RADIUS_M ** 3,
  rodCount: 8,
  heads: [{ side: 'batter', material: 'pet', plies: 1, plyThicknessM: 210e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.292 }],
}

function read(note: number, instrument = KETTLE): AnalysedReading {
  const outcome = analyseRecording({ wav: renderNote(0, KETTLEDRUM, note), instrument, side: 'batter', strike: 'edge', rod: 1, firstRod: 1, centreDamped: false, temperatureC: 20 })
  if (outcome.kind === 'refused') throw new Error(`note ${note} was refused: ${outcome.refusal.code}`)
  return outcome.reading
}

const modeHz = (reading: AnalysedReading, m: number): number => {
  const found = reading.modes.find(mode => mode.m === m && mode.n === 1 && mode.head !== 'other')
  if (!found) throw new Error(`no (${m},1) among ${reading.modes.map(mode => `(${mode.m},${mode.n}) ${mode.measuredHz.toFixed(1)}`).join(' ')}`)
  return found.measuredHz
}

describe('a real kettledrum', () => {
  beforeAll(requirePackages)

  for (let note = 40; note <= 53; note++) {
    it(`playing note ${note} has its principal tone, fifth and octave found and named (1,1), (2,1) and (3,1)`, () => {
      const reading = read(note)
      const named = 440 * 2 ** ((note - 69) / 12) // ISO 16:1975, equal temperament
      const cents = 1200 * Math.log2(modeHz(reading, 1) / named)
      // Source of the three ranges: the head of this file; the ends are widened by 3 cents, a tenth of what one bin of a 1 s window is at 80 Hz.
      expect(cents).toBeGreaterThan(-3)
      expect(cents).toBeLessThan(53)
      const fifth = modeHz(reading, 2) / modeHz(reading, 1)
      expect(fifth).toBeGreaterThanOrEqual(1.46)
      expect(fifth).toBeLessThanOrEqual(1.515) // 1.51 as found, and the rounding of its last digit
      const octave = modeHz(reading, 3) / modeHz(reading, 1)
      expect(octave).toBeGreaterThanOrEqual(1.92)
      expect(octave).toBeLessThanOrEqual(2.0)
    })
  }

  it('whose film is stated thinner than what fits is not silently misread: note 47 is named as above or marked doubtful', () => {
    const thinner = { ...KETTLE, heads: [{ ...KETTLE.heads[0]!, plyThicknessM: 190e-6, arealDensityKgM2: 0.264 }] }
    const reading = read(47, thinner)
    const principal = reading.modes.find(mode => mode.m === 1 && mode.n === 1)
    const cents = principal ? 1200 * Math.log2(principal.measuredHz / (440 * 2 ** ((47 - 69) / 12))) : NaN // ISO 16:1975
    expect((cents > -3 && cents < 53) || reading.doubtful).toBe(true) // the range at the head of this file, widened as above
  })

  it('stays the same drum, read a semitone higher, when the same sample is played a semitone higher', () => {
    // Notes 49 and 50 are one recording at two speeds, read on the same kettle: tension goes with the square of pitch,
    // but for the air, whose load hardly changes over a semitone.
    const low = read(49)
    const high = read(50)
    expect(modeHz(high, 1) / modeHz(low, 1)).toBeCloseTo(2 ** (1 / 12), 2) // the set tunes its samples within some cents
    expect(high.tension.nPerM / low.tension.nPerM / 2 ** (1 / 6)).toBeCloseTo(1, 1.3) // 2.5 %: the ring of the sample is the same, its air is not
  })
})
