import { describe, expect, it } from 'vitest'
import { besselJ, besselJPrime, besselJUpTo, besselPrimeZero, besselZero, sphericalBesselUpTo } from '../../../shared/acoustics'
import zeros from '../../reference/bessel-zeros.json'
import reference from '../../reference/acoustics.json'

describe('Bessel functions', () => {
  it.each(reference.bessel)('give J_$m($x) and its slope as mpmath does', ({ m, x, value, slope }) => {
    // Source: mpmath besselj at 30 digits (tests/reference/acoustics.py). 1e-13: the accuracy asked for, beyond x = 1000 the rounding of x.
    expect(Math.abs(besselJ(m, x) - value)).toBeLessThan(1e-13)
    expect(Math.abs(besselJPrime(m, x) - slope)).toBeLessThan(1e-13) // the same accuracy as the values it is made of
  })

  it('agree with the printed tables', () => {
    // Source: Abramowitz & Stegun, table 9.1: J_0(2.0), J_1(2.0), J_2(2.0); 5e-11: the table's last decimal.
    expect(Math.abs(besselJ(0, 2) - 0.2238907791)).toBeLessThan(5e-11) // half a unit of the printed tenth decimal
    expect(Math.abs(besselJ(1, 2) - 0.5767248078)).toBeLessThan(5e-11) // half a unit of the printed tenth decimal
    expect(Math.abs(besselJ(2, 2) - 0.3528340286)).toBeLessThan(5e-11) // half a unit of the printed tenth decimal
  })

  it('keep relative accuracy where the value is tiny', () => {
    const leading = (0.003 / 2) ** 5 / 120 // DLMF 10.7.3: J_m(x) -> (x/2)^m / m!
    expect(besselJ(5, 0.003) / leading - 1).toBeCloseTo(0, 6) // the next term is x^2/24 = 4e-7
  })

  it('satisfy 1 = J_0^2 + 2 sum J_k^2 on either side of the change of method', () => {
    for (const x of [0.7, 11, 24.999, 25.001, 60, 140]) {
      const j = besselJUpTo(250, x)
      const sum = j.reduce((total, value, k) => total + (k === 0 ? 1 : 2) * value * value, 0) // DLMF 10.23.3
      expect(Math.abs(sum - 1)).toBeLessThan(1e-13) // rounding of some 250 terms
    }
  })

  it('start at 1 for order 0 and at 0 for the others', () => {
    expect(Array.from(besselJUpTo(3, 0))).toEqual([1, 0, 0, 0])
  })

  it('refuse a negative argument and a broken order', () => {
    expect(() => besselJ(0, -1)).toThrow(RangeError)
    expect(() => besselJ(1.5, 1)).toThrow(RangeError)
    expect(() => besselJ(0, Number.NaN)).toThrow(RangeError)
  })
})

describe('zeros', () => {
  it.each(Object.entries(zeros.values))('of J_m, number %s, stand where the reference has them', (key, value) => {
    const [m, n] = key.split(',').map(Number) as [number, number]
    // Source: tests/reference/bessel-zeros.json (mpmath; Abramowitz & Stegun table 9.5).
    expect(Math.abs(besselZero(m, n) / value - 1)).toBeLessThan(1e-14) // a few units of the last place
  })

  it.each(Object.entries(reference.primeZeros))('of J_m\', number %s, stand where mpmath has them', (key, value) => {
    const [m, q] = key.split(',').map(Number) as [number, number]
    expect(Math.abs(besselPrimeZero(m, q) / value - 1)).toBeLessThan(1e-13) // the slope of J' loses a digit where m is large
  })

  it('come in the same order whichever is asked for first', () => {
    expect(besselZero(14, 9)).toBeGreaterThan(besselZero(14, 8))
    expect(Math.abs(besselJ(14, besselZero(14, 9)))).toBeLessThan(1e-14) // a root's residual is rounding
  })
})

describe('spherical Bessel functions', () => {
  it.each(reference.spherical)('give j_$p($x) as mpmath does', ({ p, x, value }) => {
    // Source: mpmath, sqrt(pi/(2x)) J_(p+1/2)(x) (tests/reference/acoustics.py).
    expect(Math.abs(sphericalBesselUpTo(p, x)[p]! - value)).toBeLessThan(1e-13 * Math.max(Math.abs(value), 0.01)) // rounding
  })
})
