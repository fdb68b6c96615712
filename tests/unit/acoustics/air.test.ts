import { describe, expect, it } from 'vitest'
import { airAt } from '../../../shared/acoustics'
import { freeDiscTables, rigidDiscMass } from '../../../shared/acoustics/airFreeDisc'
import { halfSpaceTables } from '../../../shared/acoustics/airHalfSpace'
import { KAPPA_ROWS, KAPPA_STEP, newStencil, placeStencil, readStencil, type AirTable } from '../../../shared/acoustics/airTable'
import reference from '../../reference/acoustics.json'

function at(table: AirTable, part: 'mass' | 'loss', n: number, p: number, kappa0: number): number {
  const stencil = newStencil()
  placeStencil(kappa0, stencil)
  return readStencil(table[part], table.width, (n - 1) * n / 2 + p - 1, stencil.row, stencil.weights)
}

describe('air', () => {
  it('has the standard density and sound speed at 15 degrees', () => {
    const air = airAt({ temperatureC: 15 })
    expect(Math.abs(air.densityKgM3 - 1.225)).toBeLessThan(5e-4) // Source: ISO 2533 (1.225 kg/m3); half its last digit
    expect(Math.abs(air.soundSpeedMPerS - 340.29)).toBeLessThan(0.01) // Source: ISO 2533 (340.29 m/s); the gas constant's newer digits
  })

  it('is lighter and faster when damp', () => {
    const dry = airAt({ temperatureC: 25 })
    const damp = airAt({ temperatureC: 25, relativeHumidity: 1 })
    expect(damp.densityKgM3).toBeLessThan(dry.densityKgM3)
    expect(damp.soundSpeedMPerS).toBeGreaterThan(dry.soundSpeedMPerS)
  })

  it('refuses a temperature that no bench has', () => {
    expect(() => airAt({ temperatureC: 95 })).toThrow(RangeError)
    expect(() => airAt({ temperatureC: Number.NaN })).toThrow(RangeError)
  })
})

describe('half space', () => {
  it.each(reference.halfSpace)('loads ($m; $n, $p) at kappa0 = $kappa0 as a quadrature in k does', ({ m, n, p, kappa0, mass, loss }) => {
    // Source: scipy.integrate.quad on the Hankel integral in k (tests/reference/acoustics.py).
    const table = halfSpaceTables()[m]!
    expect(Math.abs(at(table, 'mass', n, p, kappa0) - mass)).toBeLessThan(5e-5) // cubic interpolation on the table's grid
    expect(Math.abs(at(table, 'loss', n, p, kappa0) - loss)).toBeLessThan(5e-5) // cubic interpolation on the table's grid
  })

  it('radiates as a plane wave when the head is many wavelengths wide', () => {
    // Resistance rho0 c0 a side: loss / (rho0 R) = 1 / kappa0. Source: Morse & Ingard ch. 7, large piston.
    const kappa0 = 15.5
    expect(at(halfSpaceTables()[0]!, 'loss', 1, 1, kappa0) * kappa0).toBeCloseTo(1, 1) // diffraction of order 1/kappa0
  })

  it('never feeds energy into a mode', () => {
    for (const table of halfSpaceTables()) {
      for (let row = 0; row < KAPPA_ROWS; row++) for (let n = 1; n <= 4 && n * (n + 1) / 2 <= table.width; n++) {
        expect(at(table, 'loss', n, n, row * KAPPA_STEP)).toBeGreaterThanOrEqual(0)
      }
    }
  })
})

describe('free disc', () => {
  it('carries 8/3 rho R^3 of air when it moves as a piston', () => {
    // Source: Lamb, Hydrodynamics, section 102: both sides together. Whole mass = 2 pi * (mass per rho0 R).
    expect(2 * Math.PI * rigidDiscMass(0, 0).mass).toBeCloseTo(8 / 3, 12) // closed form: rounding only
  })

  it('carries 16/45 rho R^5 of moment when it rocks', () => {
    // Source: Lamb, Hydrodynamics, section 108: moment of the air about a diameter, both sides.
    expect(Math.PI * rigidDiscMass(1, 0).mass).toBeCloseTo(16 / 45, 12) // closed form: rounding only
  })

  it('radiates as a dipole when small: the piston\'s resistance grows as the fourth power of frequency', () => {
    // Dipole of force F: W ~ F^2 omega^2, F = omega M v; resistance omega * loss ~ kappa^4, so loss ~ kappa^3.
    const ratio = rigidDiscMass(0, 0.2).loss / rigidDiscMass(0, 0.1).loss
    expect(Math.abs(ratio - 8)).toBeLessThan(0.3) // the next term is of order kappa0^2 = 0.04
  })

  it('has less air on it than a head in a baffle, and for the highest modes nearly as much', () => {
    const free = freeDiscTables()
    const baffled = halfSpaceTables()
    expect(at(free[0]!, 'mass', 1, 1, 0.4) / (2 * at(baffled[0]!, 'mass', 1, 1, 0.4))).toBeLessThan(0.8)
    expect(at(free[8]!, 'mass', 1, 1, 0.4) / (2 * at(baffled[8]!, 'mass', 1, 1, 0.4))).toBeGreaterThan(0.9)
    expect(at(free[8]!, 'mass', 1, 1, 0.4) / (2 * at(baffled[8]!, 'mass', 1, 1, 0.4))).toBeLessThan(1)
  })

  it('radiates as two plane waves when it is many wavelengths wide', () => {
    expect(at(freeDiscTables()[0]!, 'loss', 1, 1, 15.5) * 15.5).toBeCloseTo(2, 0) // diffraction of order 1/kappa0
  })
})
