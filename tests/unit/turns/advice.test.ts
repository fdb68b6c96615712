import { describe, expect, it } from 'vitest'
import { adviseTurns } from '../../../server/utils/turns/advice'
import { idealRisePerTurn } from '../../../server/utils/turns/rodKernel'
import { situation, tomModel } from './situations'

const to = (tensionNPerM: number) => ({ kind: 'mean' as const, tensionNPerM })
const codes = (advice: { cautions: { code: string }[] }) => advice.cautions.map(caution => caution.code)
const known = { value: 0.5, variance: 0.02 ** 2, passes: 2 }

describe('the turns of one pass', () => {
  it('turns all rods alike in whole sixteenths, and predicts what those rounded turns give', () => {
    const start = situation()
    const advice = adviseTurns(start, to(3100))
    // By hand: one turn of every rod adds 0.5 * 10797 = 5399 N/m, so 700 N/m want 2.07 sixteenths.
    expect(advice.rods).toEqual(Array.from({ length: 8 }, (_, i) => ({ rod: i + 1, turns: 2 / 16 })))
    expect(advice.predicted.tensionNPerM).toBeCloseTo(2400 + 5398.6 / 8, 0) // to 0.5 N/m: the hand figure has five digits
    expect(advice.predicted.fundamentalHz).toBeCloseTo(tomModel.fundamentalHz(advice.predicted.tensionNPerM), 9) // the anchor is the model itself here
    expect(advice.goal.tensionNPerM).toBe(3100)
    expect(advice.remainingPasses).toBe(0)
    expect(advice.order).toHaveLength(8)
  })

  it('turns to the left for a lower target', () => {
    const advice = adviseTurns(situation({ kappa: known }), to(1700))
    expect(advice.rods[0]!.turns).toBe(-2 / 16)
    expect(advice.predicted.tensionNPerM).toBeLessThan(2400)
  })

  it('goes no further than half a turn and says how many passes are left', () => {
    const advice = adviseTurns(situation({ kappa: known }), to(2400 + 1.2 * 5400))
    expect(new Set(advice.rods.map(rod => rod.turns))).toEqual(new Set([0.5]))
    expect(advice.remainingPasses).toBe(2)
    expect(codes(advice)).toEqual(expect.arrayContaining(['more-passes', 'large-pass', 'binding-rod']))
    expect(advice.predicted.tensionNPerM).toBeLessThan(advice.goal.tensionNPerM)
  })

  it('never lets a head hang loose, even if its rods pull two deviations more than thought', () => {
    const start = situation({ tensionNPerM: 1500 })
    const advice = adviseTurns(start, to(100))
    const strongest = (start.kappa.value + 2 * Math.sqrt(start.kappa.variance)) * idealRisePerTurn(start.rods)
    expect(advice.rods[0]!.turns).toBeLessThan(0)
    expect(1500 + strongest * advice.rods[0]!.turns).toBeGreaterThan(0)
    expect(advice.remainingPasses).toBeGreaterThan(0)
  })

  it('says that nothing needs turning when the target is reached', () => {
    const advice = adviseTurns(situation(), to(2400))
    expect(advice.rods.every(rod => Object.is(rod.turns, 0))).toBe(true)
    expect(codes(advice)).toContain('no-turn-needed')
    expect(codes(advice)).not.toContain('first-pass')
  })

  it('states film stress as tension over thickness and its share of yield', () => {
    const advice = adviseTurns(situation(), to(3100))
    expect(advice.filmStress.mPa).toBeCloseTo(advice.predicted.tensionNPerM / 250e-6 / 1e6, 9) // definition of stress, T / h
    expect(advice.filmStress.shareOfYield).toBeCloseTo(advice.filmStress.mPa / 100, 9) // yield of 100 MPa
  })

  it('refuses a target past the film\'s yield and says what can be reached', () => {
    // 100 MPa on 250 um is 25 000 N/m.
    expect(() => adviseTurns(situation(), to(26_000))).toThrowError(/yields at about 25000 N\/m; up to 20000 N\/m, \d+ Hz/)
  })

  it.each([[0.5, []], [0.65, ['near-yield']], [0.85, ['close-to-yield']]])('warns at %f of yield: %s', (share, expected) => {
    const advice = adviseTurns(situation({ tensionNPerM: share * 25_000 - 300, kappa: known }), to(share * 25_000))
    expect(codes(advice).filter(code => code.endsWith('yield'))).toEqual(expected)
  })

  it('warns of a doubtful reading, of a first pass, and of the other head', () => {
    expect(codes(adviseTurns(situation({ doubtful: true }), to(3100)))).toContain('doubtful-reading')
    expect(codes(adviseTurns(situation(), to(3100)))).toContain('first-pass')
    expect(codes(adviseTurns(situation({ kappa: known }), to(3100)))).not.toContain('first-pass')
    expect(codes(adviseTurns(situation({ construction: 'double-headed' }), to(3100)))).toContain('other-head')
  })
})

describe('evening a head out', () => {
  it('needs a round', () => {
    expect(() => adviseTurns(situation(), { kind: 'even' })).toThrowError(/Record a round first/)
  })

  it('tightens slack rods, slackens tight ones, keeps the mean, and leaves the rim more even', () => {
    const deviationsPercent = [8, 0, -8, 0, 8, 0, -8, 0]
    const advice = adviseTurns(situation({ deviationsPercent, kappa: known }), { kind: 'even' })
    expect(advice.rods[0]!.turns).toBeLessThan(0)
    expect(advice.rods[2]!.turns).toBeGreaterThan(0)
    expect(Math.abs(advice.predicted.tensionNPerM - 2400)).toBeLessThan(5399 / 16 / 8) // one rod's sixteenth: what rounding may leave
    expect(advice.predicted.evennessPercent!).toBeLessThan(8)
    for (const rod of advice.rods) expect(16 * rod.turns).toBe(Math.round(16 * rod.turns))
  })

  it('leaves a head alone that sixteenths would not make more even', () => {
    const advice = adviseTurns(situation({ deviationsPercent: [0.3, 0, -0.3, 0, 0.3, 0, -0.3, 0] }), { kind: 'even' })
    expect(advice.rods.every(rod => rod.turns === 0)).toBe(true)
    expect(codes(advice)).toContain('no-turn-needed')
  })
})
