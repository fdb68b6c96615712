/** Simulated drums that mislead a simple reading: kettles, two heads, a strongest line that is not (0,1), glide, split pairs. */
import { describe, expect, it } from 'vitest'
import { drawCase } from '../../support/drum/cases'
import type { SimMode, SimTap } from '../../support/drum'
import { describeJudged, readTap } from './readTap'

describe('a simulated kettle at 30 dB', () => {
  for (const [seed, diameterIn] of [[1, 23], [2, 26], [3, 29], [4, 32]] as const) {
    it(`of ${diameterIn} in, struck near the edge, reads its tension within 2 % and names (1,1) and (2,1)`, async () => {
      const { tap, rodCount } = drawCase('kettle', seed, { diameterIn, place: 'edge', film: 'pet', snrDb: 30 })
      const judged = await readTap({ ...tap, strike: { ...tap.strike, centreDamped: false } }, 'edge', rodCount)
      expect(Math.abs(judged.tensionError ?? 1), describeJudged(judged)).toBeLessThan(0.02) // issue 2's figure for single heads
      for (const m of [1, 2]) {
        const true1 = judged.truth.modes.filter(mode => mode.m === m && mode.n === 1)
        const read = judged.reading!.modes.find(mode => mode.m === m && mode.n === 1)
        // A pair may be read as its mean or as either line: stay inside the pair, widened by 0.4 %, what a room's tail moves a line by.
        expect(read?.measuredHz, describeJudged(judged)).toBeGreaterThan(Math.min(...true1.map(mode => mode.hz)) * 0.996)
        expect(read?.measuredHz, describeJudged(judged)).toBeLessThan(Math.max(...true1.map(mode => mode.hz)) * 1.004)
      }
    })
  }
})

describe('a simulated double-headed drum at 30 dB', () => {
  for (const [seed, diameterIn] of [[1, 10], [2, 13], [3, 16]] as const) {
    it(`of ${diameterIn} in, struck near the edge, reads its tension within 4 %, or says that it is doubtful`, async () => {
      const { tap, rodCount, film } = drawCase('double-headed', seed, { diameterIn, place: 'edge', film: 'pet', snrDb: 30 })
      const judged = await readTap(tap, 'edge', rodCount, film)
      expect(judged.outcome.kind, describeJudged(judged)).toBe('read')
      // Twice the single heads' figure, as issue 3 allows for an unknown second head.
      expect(Math.abs(judged.tensionError!) < 0.04 || judged.reading!.doubtful, describeJudged(judged)).toBe(true)
    })
  }
})

describe('a tap whose strongest line is not (0,1)', () => {
  for (const construction of ['fixture', 'open', 'frame'] as const) {
    it(`on a ${construction} head, near the edge with a finger on the centre, is still read right`, async () => {
      const drawn = drawCase(construction, 11, { place: 'edge', diameterIn: 14, film: 'pet', snrDb: 30, fundamentalHz: 120 })
      const tap: SimTap = { ...drawn.tap, strike: { ...drawn.tap.strike, radiusRatio: 0.82, contactS: 0.0015, centreDamped: true }, microphone: { radiusRatio: 0.7, angleRad: drawn.tap.strike.angleRad, heightM: 0.04 }, recording: { ...drawn.tap.recording, room: undefined } }
      const judged = await readTap(tap, 'edge', drawn.rodCount)
      // Strongest over the whole ring: energy goes with level squared over decay.
      const strength = (mode: SimMode): number => mode.levelDb - 10 * Math.log10(mode.gammaPerS)
      const strongest = judged.truth.modes.reduce((best, mode) => strength(mode) > strength(best) ? mode : best)
      expect(strongest.m, 'the case must be one where (0,1) is not the strongest').toBeGreaterThan(0)
      expect(Math.abs(judged.tensionError ?? 1), describeJudged(judged)).toBeLessThan(0.02) // issue 2's figure
      expect(Math.abs(judged.fundamentalError ?? 1), describeJudged(judged)).toBeLessThan(0.005) // predicted from the fit
    })
  }
})

describe('the strength of a stroke', () => {
  it('does not change what is read: tension within 1 %, fundamental within 0.5 %, from soft to a glide of several percent', async () => {
    const drawn = drawCase('open', 21, { place: 'half-way', diameterIn: 12, film: 'pet', snrDb: 30, fundamentalHz: 140, even: true })
    const tap: SimTap = { ...drawn.tap, recording: { ...drawn.tap.recording, room: undefined } }
    const soft = await readTap(tap, 'half-way', drawn.rodCount)
    for (const glide of [0.03, 0.08]) {
      const hard = await readTap({ ...tap, strike: { ...tap.strike, glide } }, 'half-way', drawn.rodCount)
      // Source of the figures: issue 3, "Real drums".
      expect(Math.abs(hard.reading!.tension.nPerM / soft.reading!.tension.nPerM - 1), describeJudged(hard)).toBeLessThan(0.01)
      expect(Math.abs(hard.reading!.fundamentalHz / soft.reading!.fundamentalHz - 1), describeJudged(hard)).toBeLessThan(0.005)
    }
  })
})

describe('an uneven simulated head', () => {
  it('has its split (1,1) reported with both lines', async () => {
    const drawn = drawCase('frame', 31, { place: 'half-way', diameterIn: 14, film: 'pet', snrDb: 40, fundamentalHz: 140, even: true })
    const drum = { ...drawn.tap.drum, unevenness: [{ k: 2, ratio: 0.03, phaseRad: 0.5 }], lossPerS: 1.5, lossPerHz: 0.012 }
    // Struck and heard between the pair's axes, so that both lines sound.
    const tap: SimTap = { ...drawn.tap, drum, strike: { ...drawn.tap.strike, angleRad: 0.5 + Math.PI / 4 }, microphone: { radiusRatio: 0.5, angleRad: 0.5 + Math.PI / 4, heightM: 0.1 }, recording: { ...drawn.tap.recording, room: undefined, hum: undefined, ringS: 2 } }
    const judged = await readTap(tap, 'half-way', drawn.rodCount)
    const pair = judged.truth.modes.filter(mode => mode.m === 1 && mode.n === 1).map(mode => mode.hz).sort((a, b) => a - b)
    const read = judged.reading?.modes.find(mode => mode.m === 1 && mode.n === 1)
    expect(pair).toHaveLength(2)
    expect(read?.splitHz, describeJudged(judged)).toBeDefined()
    expect(read!.splitHz![0] / pair[0]!).toBeCloseTo(1, 3) // 0.05 %: a thirtieth of the split
    expect(read!.splitHz![1] / pair[1]!).toBeCloseTo(1, 3) // same
  })
})
