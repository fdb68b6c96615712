import { describe, expect, it } from 'vitest'
import { idealRisePerTurn, kernelSpectrum, rodKernel, type RodKernelOptions } from '../../../server/utils/turns/rodKernel'

// A 14 in head of 250 um PET on eight rods.
const tom: RodKernelOptions = { rodCount: 8, radiusM: 0.1778, filmStiffnessNPerM: 4.5e9 * 250e-6, poisson: 0.38, threadPitchM: 1.058e-3, kappa: 0.5 }
const small: RodKernelOptions = { ...tom, rodCount: 6, radiusM: 0.127 }

describe('what one rod does to the rim', () => {
  it('lifts mean tension by E h / ((1 - nu) R) times the advance for a turn of every rod, if nothing else gives', () => {
    // By hand: 4.5e9 * 250e-6 / (0.62 * 0.1778) * 1.058e-3 = 10797 N/m a turn (plane stress: strain delta / R on every side).
    expect(idealRisePerTurn(tom)).toBeCloseTo(10_797, -1) // -1: the figure above is rounded to the unit
  })

  it('adds up to kappa of that when all rods turn alike', () => {
    const sum = rodKernel(tom).reduce((total, g) => total + g, 0)
    expect(sum).toBeCloseTo(0.5 * idealRisePerTurn(tom), 6) // 6: one cosine transform and back, in doubles
  })

  it.each([['a 14 in head', tom], ['a 10 in head', small]])('carries no net force on %s: one rod\'s turn has no k = 1', (_, options) => {
    const row = rodKernel(options)
    const first = row.reduce((sum, g, d) => sum + g * Math.cos(2 * Math.PI * d / row.length), 0)
    expect(Math.abs(first)).toBeLessThan(1e-9 * row[0]!) // rounding of a sum of eight terms
  })

  it('lifts the rim opposite by a third to two thirds as much on a small drum', () => {
    const row = rodKernel(small)
    const opposite = row[3]! / row[0]!
    // Common practice, no source: why heads are tuned in cross order.
    expect(opposite).toBeGreaterThan(1 / 3)
    expect(opposite).toBeLessThan(2 / 3)
  })

  it('pulls most at its own place and least beside it, where the rim may even slacken', () => {
    const row = rodKernel(tom)
    expect(row[0]).toBe(Math.max(...row))
    expect([row[1], row[2]]).toContain(Math.min(...row))
    expect(row[1]!).toBeLessThan(row[4]!)
  })

  it('is the same seen from either side, for any number of rods', () => {
    for (let rodCount = 3; rodCount <= 24; rodCount++) {
      const row = rodKernel({ ...tom, rodCount })
      for (let d = 1; d < rodCount; d++) expect(row[d]).toBeCloseTo(row[rodCount - d]!, 6) // rounding only
      expect(Math.min(...kernelSpectrum({ ...tom, rodCount }))).toBeGreaterThanOrEqual(0)
    }
  })
})
