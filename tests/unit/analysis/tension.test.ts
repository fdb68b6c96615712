import { describe, expect, it } from 'vitest'
import { studentT95 } from '../../../server/utils/analysis/budget'
import { explainLines } from '../../../server/utils/analysis/matching'
import { modeModelError, modelPriors } from '../../../server/utils/analysis/matchingPriors'
import { solveWeighted } from '../../../server/utils/analysis/tensionSolve'
import { findingsOf, requestOf, type LineCase } from './matching.support'

describe('weighted least squares', () => {
  const row = (gradient: number[], residual: number, error: number) => ({ source: { kind: 'mode' as const, noise: error, modelError: 0, uneven: 0 }, gradient, residual, error })

  it('fits a straight line as the textbook does', () => {
    // y = a + b x through (0, 1), (1, 3), (2, 4), equal errors: a = 7/6, b = 3/2; var(a) = 5/6, var(b) = 1/2 by hand from the normal equations.
    const { step, covariance, gains } = solveWeighted([row([1, 0], 1, 1), row([1, 1], 3, 1), row([1, 2], 4, 1)])
    expect(step[0]).toBeCloseTo(7 / 6, 5) // the trace of a prior, 1e-6, keeps it from being exact
    expect(step[1]).toBeCloseTo(3 / 2, 5) // the same trace
    expect(covariance[0]).toBeCloseTo(5 / 6, 5) // the same trace
    expect(covariance[3]).toBeCloseTo(1 / 2, 5) // the same trace
    expect(gains.reduce((sum, gain, i) => sum + gain * [1, 3, 4][i]!, 0)).toBeCloseTo(step[0]!, 9) // gains are linear: rounding
  })

  it('believes a precise row more than a vague one', () => {
    const { step } = solveWeighted([row([1], 0, 0.01), row([1], 1, 1)])
    expect(step[0]).toBeCloseTo(1e-4, 5) // weights 10^4 to 1
  })
})

describe('Student\'s t', () => {
  it.each([[4, 2.776], [5, 2.571], [10, 2.228], [30, 2.042], [1e9, 1.96]])('for %d degrees of freedom is %d', (freedom, value) => {
    // Source: Abramowitz & Stegun, table 26.10 (two-sided 95 %), three decimals.
    expect(Math.abs(studentT95(freedom) / value - 1)).toBeLessThan(0.003) // the expansion's stated error
  })
})

describe('what a mode is worth', () => {
  it('is least where the shell\'s air rules and where a single line of a split pair was heard', () => {
    const open = modelPriors('open')
    expect(modeModelError(open, 0, 1, false)).toBeGreaterThan(modeModelError(open, 2, 1, false))
    expect(modeModelError(open, 1, 1, false)).toBeGreaterThan(modeModelError(open, 1, 1, true))
    expect(modelPriors('fixture').airAxisymmetric).toBeLessThan(open.airAxisymmetric)
  })
})

describe('the tension\'s budget', () => {
  const drum: LineCase = { construction: 'fixture', tensionNPerM: 3000, x0: 0.5, seed: 12 }
  const reading = explainLines(findingsOf(drum), requestOf(drum))

  it('adds up to the whole, by square', () => {
    expect(reading.budget.reduce((sum, part) => sum + part.share, 0)).toBeCloseTo(1, 9) // shares of one sum: rounding
    const combined = Math.hypot(...reading.budget.map(part => part.standardNPerM))
    expect(reading.tension.u95NPerM / combined).toBeGreaterThan(1.95)
    expect(reading.tension.u95NPerM / combined).toBeLessThan(2.6)
  })

  it('names frequency, scatter, air, edge, diameter, areal density and temperature', () => {
    expect(reading.budget.map(part => part.name)).toEqual(expect.arrayContaining(['frequency', 'spread across modes', 'air load', 'film bend at the edge', 'diameter', 'areal density', 'temperature']))
    expect(reading.budget.find(part => part.name === 'frequency')?.kind).toBe('A')
    expect(reading.budget.find(part => part.name === 'diameter')?.kind).toBe('B')
  })

  it('repeats better on the same bench than it is right', () => {
    expect(reading.tension.repeatabilityU95NPerM).toBeLessThan(0.45 * reading.tension.u95NPerM) // air, edge, mass and diameter, most of the whole, are the same at every tap
    expect(reading.tension.repeatabilityU95NPerM).toBeGreaterThan(0)
  })

  it('puts about twice the diameter\'s and about the mass\'s share of the areal density\'s error on the tension', () => {
    // T = sigma (2 pi R f / alpha)^2: 2 x 0.1 % by radius, 1 % by sigma, each lessened or moved by the air's part.
    const diameter = reading.budget.find(part => part.name === 'diameter')!.standardNPerM / reading.tension.nPerM
    const density = reading.budget.find(part => part.name === 'areal density')!.standardNPerM / reading.tension.nPerM
    expect(diameter).toBeGreaterThan(0.002)
    expect(diameter).toBeLessThan(0.003)
    expect(density).toBeGreaterThan(0.005)
    expect(density).toBeLessThan(0.01)
  })

  it('is wider where the shell\'s air is less known', () => {
    const open: LineCase = { ...drum, construction: 'open', x0: 0.05 }
    const wide = explainLines(findingsOf(open), requestOf(open))
    const air = (of: typeof wide) => of.budget.find(part => part.name === 'air load')!.standardNPerM / of.tension.nPerM
    expect(air(wide)).toBeGreaterThan(air(reading))
  })
})
