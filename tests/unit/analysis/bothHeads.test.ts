import { describe, expect, it } from 'vitest'
import { explainLines } from '../../../server/utils/analysis/matching'
import { readBothHeads, type TappedReading } from '../../../server/utils/analysis/matchingBoth'
import type { HeadSide } from '../../../shared/types/reading'
import { simulateTap } from '../../support/drum'
import { drawCase } from '../../support/drum/cases'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import { requestFor } from '../accuracy/readTap'
import { findingsOf, requestOf } from './matching.support'

const drawn = drawCase('double-headed', 7009, { place: 'edge', snrDb: 30, diameterIn: 13 })

function tapped(side: HeadSide) {
  const tap = { ...drawn.tap, strike: { ...drawn.tap.strike, side, centreDamped: false }, recording: { ...drawn.tap.recording, room: undefined, hum: undefined } }
  const sound = simulateTap(tap)
  const request = requestFor(sound, tap, 'edge', drawn.rodCount, drawn.film)
  const outcome = analyseRecording(request)
  if (outcome.kind === 'refused') throw new Error(outcome.refusal.code)
  const stored: TappedReading = { side, strike: 'edge', centreDamped: false, temperatureC: request.temperatureC, reading: outcome.reading }
  return { stored, instrument: request.instrument, truth: sound.truth }
}

describe('a drum with two heads', () => {
  const batter = tapped('batter')
  const resonant = tapped('resonant')
  const [trueBatter, trueResonant] = [batter.truth.tensionNPerM, resonant.truth.tensionNPerM]

  it.each([['batter', batter], ['resonant', resonant]] as const)('is read from a tap on its %s head as that head', (side, { stored, truth }) => {
    expect(stored.reading.twoHeads?.struck).toBe(side)
    expect(Math.abs(stored.reading.tension.nPerM / truth.tensionNPerM - 1)).toBeLessThan(0.03) // issue 3: twice a single head's 1.5 % at the 90th percentile
  })

  it('is read as a whole from a tap on each', () => {
    const both = readBothHeads(batter.instrument, [batter.stored, resonant.stored])
    expect(Math.abs(both.batter.nPerM / trueBatter - 1)).toBeLessThan(0.02) // better than 3 % from one tap
    expect(Math.abs(both.resonant.nPerM / trueResonant - 1)).toBeLessThan(0.02) // the same
    expect(Math.abs(both.batter.nPerM - trueBatter)).toBeLessThan(1.5 * both.batter.u95NPerM) // three standard deviations
    expect(both.doubtful).toBe(false)
    const [low] = batter.truth.fundamentalBranchesHz
    expect(both.pair.inPhase.predictedHz / low!).toBeCloseTo(1, 2) // 0.5 %: a third of 1.5 % of tension
    expect(both.pair.against.predictedHz).toBeGreaterThan(both.pair.inPhase.predictedHz)
  })

  it('names which way its heads move in the coupled pair', () => {
    const both = readBothHeads(batter.instrument, [resonant.stored, batter.stored])
    const lowest = both.modes.find(mode => mode.m === 0)
    expect(lowest?.branch).toBe('in-phase')
    expect(Math.abs(both.batter.nPerM / trueBatter - 1)).toBeLessThan(0.02) // as above, whichever tap comes first
  })

  it('is not read as a whole from one head', () => {
    expect(() => readBothHeads(batter.instrument, [batter.stored])).toThrow(RangeError)
    expect(() => readBothHeads({ ...batter.instrument, construction: 'open' }, [batter.stored, resonant.stored])).toThrow(RangeError)
  })

  it('says that the coupling is unsure when one of the pair (0,1) is not heard', () => {
    const drum = { construction: 'double-headed' as const, tensionNPerM: 2400, otherTensionNPerM: 2100, x0: 0.7, seed: 11 }
    const whole = findingsOf(drum)
    const lowestHz = Math.min(...whole.lines.map(line => line.frequencyHz))
    const without = explainLines({ ...whole, lines: whole.lines.filter(line => line.frequencyHz > lowestHz) }, requestOf(drum))
    expect(without.twoHeads?.unsure).toContain('coupling')
  })
})
