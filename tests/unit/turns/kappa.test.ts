import { describe, expect, it } from 'vitest'
import { type Kappa, KAPPA_PRIOR, learnKappa } from '../../../server/utils/turns/kappa'

const seen = { meanTurns: 0.25, rodCount: 8, idealRisePerTurn: 10_000, beforeNPerM: 2000, afterNPerM: 2000 + 0.7 * 2500, differenceStandardNPerM: 10 }

describe('what turns teach of a head\'s rods', () => {
  it('comes close to the truth after one good pass, and closer after a second', () => {
    const first = learnKappa(KAPPA_PRIOR, seen)
    const second = learnKappa(first, { ...seen, beforeNPerM: 3000, afterNPerM: 3000 + 0.7 * 2500 })
    // 0.03: the prior still has (0.04 of noise over 0.2 of prior)^2 of the weight of a distance of 0.2, and rods stick.
    expect(Math.abs(first.value - 0.7)).toBeLessThan(0.03)
    expect(Math.abs(second.value - 0.7)).toBeLessThan(Math.abs(first.value - 0.7))
    expect(second).toMatchObject({ passes: 2 })
    expect(second.variance).toBeLessThan(KAPPA_PRIOR.variance)
  })

  it('learns the same from slackening as from tightening', () => {
    const down = learnKappa(KAPPA_PRIOR, { ...seen, meanTurns: -0.25, beforeNPerM: seen.afterNPerM, afterNPerM: seen.beforeNPerM })
    expect(down.value).toBeCloseTo(learnKappa(KAPPA_PRIOR, seen).value, 12) // 12 digits: the same arithmetic with signs turned
  })

  it('learns little from readings that scatter more than the turn moved the film', () => {
    const noisy = learnKappa(KAPPA_PRIOR, { ...seen, differenceStandardNPerM: 5000 })
    expect(Math.abs(noisy.value - KAPPA_PRIOR.value)).toBeLessThan(0.01) // gain below P x^2 / r = 0.04 * 2500^2 / 5000^2 = 0.01 of a surprise of 0.2
  })

  it('learns nothing where next to nothing was turned', () => {
    expect(learnKappa(KAPPA_PRIOR, { ...seen, meanTurns: 1 / 64 })).toBe(KAPPA_PRIOR)
  })

  it('stays inside what rods can do, however odd the readings', () => {
    const wild = (afterNPerM: number): Kappa => learnKappa(KAPPA_PRIOR, { ...seen, afterNPerM, differenceStandardNPerM: 1 })
    expect(wild(50_000).value).toBeLessThanOrEqual(1.3)
    expect(wild(100).value).toBeGreaterThanOrEqual(0.05)
  })
})
