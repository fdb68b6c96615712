/**
 * Real kettledrums: notes 40 to 53 of the General MIDI kettledrum (program 48 of the list, index 47) as Debian's
 * fluid-soundfont-gm plays them. What was found in them by hand, with an interpolated FFT outside this project: the
 * principal tone (1,1) lies 0 to 50 cents above the named note, (2,1) : (1,1) is 1.46 to 1.51 and (3,1) : (1,1) 1.92 to 2.00.
 */
import { beforeAll, describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import type { Explanation } from '../../../server/utils/analysis/explanation'
import { explainLines } from '../../../server/utils/analysis/matching'
import type { AnalysedInstrument } from '../../../server/utils/analysis/types'
import { renderNote, requirePackages } from './soundfont'

const KETTLEDRUM = 47

/**
 * A 26 in kettle, whose usual range covers these notes, and a bowl of 1.1 pi R^3: nobody knows the drum that was
 * recorded, nor its film, so each note is read with three films that such a drum may have. No film was chosen for fitting.
 */
const RADIUS_M = 26 * 0.0254 / 2
const FILMS_UM = [190, 200, 210] as const
const NOTES = Array.from({ length: 14 }, (_, i) => 40 + i)

function kettle(thicknessUm: number): AnalysedInstrument {
  return {
    construction: 'kettle',
    radiusM: RADIUS_M,
    depthM: 0,
    bowlVolumeM3: 1.1 * Math.PI * RADIUS_M ** 3,
    rodCount: 8,
    heads: [{ side: 'batter', material: 'pet', plies: 1, plyThicknessM: thicknessUm * 1e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: thicknessUm * 1e-6 * 1390 }],
  }
}

/** A note's lines are found once and explained with every film. */
function readWithFilms(note: number): Explanation[] {
  let explanations: Explanation[] = []
  const outcome = analyseRecording({ wav: renderNote(0, KETTLEDRUM, note), instrument: kettle(200), side: 'batter', strike: 'edge', rod: 1, firstRod: 1, centreDamped: false, temperatureC: 20 }, (findings, request) => {
    explanations = FILMS_UM.map(um => explainLines(findings, { ...request, instrument: kettle(um) }))
    return explanations[0]!
  })
  if (outcome.kind === 'refused') throw new Error(`note ${note} was refused: ${outcome.refusal.code}`)
  return explanations
}

const modeHz = (reading: Explanation, m: number): number => reading.modes.find(mode => mode.m === m && mode.n === 1)?.measuredHz ?? NaN
const centsOff = (reading: Explanation, note: number): number => 1200 * Math.log2(modeHz(reading, 1) / (440 * 2 ** ((note - 69) / 12))) // ISO 16:1975, equal temperament

/** Source of the ranges: the head of this file; the ends are widened by 3 cents, a tenth of one bin of a 1 s window at 80 Hz, and by the last digit. */
const principalRight = (reading: Explanation, note: number): boolean => centsOff(reading, note) > -3 && centsOff(reading, note) < 53
const within = (ratio: number, low: number, high: number): boolean => ratio > low - 0.005 && ratio < high + 0.005
const allRight = (reading: Explanation, note: number): boolean => principalRight(reading, note)
  && within(modeHz(reading, 2) / modeHz(reading, 1), 1.46, 1.51) && within(modeHz(reading, 3) / modeHz(reading, 1), 1.92, 2)

describe('real kettledrum notes', () => {
  let read: Map<number, Explanation[]>
  beforeAll(() => {
    requirePackages()
    read = new Map(NOTES.map(note => [note, readWithFilms(note)]))
  }, 240_000)

  FILMS_UM.forEach((um, film) => {
    it(`read with a film of ${um} um have principal tone, fifth and octave named (1,1), (2,1), (3,1) in ten of fourteen at least`, () => {
      const missed = NOTES.filter(note => !allRight(read.get(note)![film]!, note))
      // Four may fail: the recordings carry loops' side tones as loud as the modes, and the drum is not quite any of those stated.
      expect(missed.length, `missed ${missed.join(', ')}`).toBeLessThanOrEqual(4)
    })
  })

  it('are never read surely with another tone than the principal one as (1,1)', () => {
    // The loops' side tones stand up to 60 cents off the principal tone; the next mode 600.
    const silent = NOTES.flatMap(note => FILMS_UM.filter((_, film) => !read.get(note)![film]!.doubtful && !(Math.abs(centsOff(read.get(note)![film]!, note)) < 80)).map(um => `${note} at ${um} um`))
    expect(silent).toEqual([])
  })

  it('list no mode whose place is not known', () => {
    // 3 % (95 %): a sixth of the distance from (1,1) to (0,2), the nearest neighbours of a kettle; beyond it a name is a guess.
    for (const explanations of read.values()) for (const { modes } of explanations) for (const mode of modes) expect(mode.u95Hz / mode.measuredHz).toBeLessThan(0.03)
  })

  it('are the same drum, read a semitone higher, when the same sample is played a semitone higher', () => {
    // Notes 49 and 50 are one recording at two speeds: tension goes with the square of pitch, but for the air, whose load hardly changes over a semitone.
    const [low, high] = [read.get(49)![1]!, read.get(50)![1]!]
    expect(modeHz(high, 1) / modeHz(low, 1) / 2 ** (1 / 12)).toBeGreaterThan(0.97) // the set tunes its samples within some cents, and loops move the line by 2 %
    expect(modeHz(high, 1) / modeHz(low, 1) / 2 ** (1 / 12)).toBeLessThan(1.03) // the same
    expect(high.tension.nPerM / low.tension.nPerM / 2 ** (1 / 6)).toBeCloseTo(1, 1.3) // 2.5 %: the ring of the sample is the same, its air is not
  })
})
