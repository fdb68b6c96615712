/** The simulated drum is itself checked here, against outside values and limits, before it judges the analysis. */
import { describe, expect, it } from 'vitest'
import { CholeskyDecomposition, EigenvalueDecomposition, Matrix, inverse } from 'ml-matrix'
import bessel from '../../reference/bessel-zeros.json'
import { besselJ, jm, sphericalJ, zerosOfJ } from '../../support/drum/bessel'
import { BASIS, readAirTable } from '../../support/drum/airTable'
import { halfSpaceNodes, halfSpaceTables } from '../../support/drum/airHalfSpace'
import { freeDiscTables, JUMPS, jumpMatrices, solveJump } from '../../support/drum/airFreeDisc'
import { closedTube, openTube } from '../../support/drum/airTube'
import { c } from '../../support/drum/complex'

describe('Bessel functions of the simulated drum', () => {
  it('agree with the integral representation', () => {
    // DLMF 10.9.2: J_m(x) = (1/pi) int_0^pi cos(m t - x sin t) dt; the trapezoid rule is exact to rounding for a periodic integrand.
    for (const [m, x] of [[0, 0.3], [1, 2.5], [3, 7.7], [8, 4.1], [5, 60.2]] as const) {
      let sum = 0
      for (let i = 0; i < 400; i++) sum += Math.cos(m * 2 * Math.PI * i / 400 - x * Math.sin(2 * Math.PI * i / 400))
      expect(jm(m, x)).toBeCloseTo(sum / 400, 12) // double rounding over 400 terms
    }
  })

  it('have the zeros of the reference table', () => {
    const table: Record<string, number> = bessel.values
    for (let m = 0; m <= 8; m++) {
      const own = zerosOfJ(m, 5)
      // Source: tests/reference/bessel-zeros.json (mpmath).
      own.forEach((zero, i) => expect(zero).toBeCloseTo(table[`${m},${i + 1}`]!, 10)) // bisection to 1e-12, table to 1e-10 or better
    }
  })

  it('have spherical relatives equal to their closed forms', () => {
    const j = sphericalJ(4, 3.7, new Float64Array(5))
    expect(j[0]).toBeCloseTo(Math.sin(3.7) / 3.7, 13) // Abramowitz & Stegun 10.1.11; rounding
    expect(j[2]).toBeCloseTo((3 / 3.7 ** 3 - 1 / 3.7) * Math.sin(3.7) - 3 / 3.7 ** 2 * Math.cos(3.7), 13) // same source; rounding
  })
})

describe('air of the simulated drum', () => {
  const piston = (kappa: number): { re: number, im: number } => {
    const j = new Float64Array(4)
    const sum = { re: 0, im: 0 }
    for (const { x, weight, part } of halfSpaceNodes(kappa)) sum[part] += 2 * Math.PI * weight * (besselJ(1, x, j)[1]! / x) ** 2
    return sum
  }

  it('loads one side of a rigid disc in a baffle with 8/3 rho R^3', () => {
    // Source: Rayleigh, The Theory of Sound, § 302.
    expect(piston(1e-6).re).toBeCloseTo(8 / 3, 3) // the integral is cut at x = 150, which drops 2 pi/(2 pi 150^2) = 4e-5
  })

  it('gives a baffled piston its known radiation resistance', () => {
    for (const kappa of [0.3, 1, 2.5, 6]) {
      // Source: Morse & Ingard ch. 7.4: R = rho c pi a^2 (1 - J_1(2ka)/ka); divided by omega it is the imaginary mass.
      expect(piston(kappa).im).toBeCloseTo(Math.PI * (1 - jm(1, 2 * kappa) / kappa) / kappa, 8) // 24-node Gauss rule on a smooth integrand
    }
  })

  it('loads a free rigid disc with 8/3 rho R^3 on both sides together', () => {
    // int sqrt(1 - r^2) r dr = 1/3 projects uniform motion on the first pressure shape; the rest vanish.
    const b = Array.from({ length: JUMPS }, (_, j) => (j === 0 ? 1 / 3 : 0))
    const pressure = solveJump(jumpMatrices(0)[0]!, b)
    const mass = 2 * 2 * Math.PI * b.reduce((sum, value, i) => sum + value * pressure[i]!.re, 0)
    expect(mass).toBeCloseTo(8 / 3, 10) // Source: Lamb, Hydrodynamics, § 102; exact at zero frequency
  })

  it('radiates from a free disc as a dipole: the imaginary mass grows with the cube of frequency', () => {
    const b = Array.from({ length: JUMPS }, (_, j) => (j === 0 ? 1 / 3 : 0))
    const loss = (kappa: number): number => {
      const pressure = solveJump(jumpMatrices(kappa)[0]!, b)
      return 4 * Math.PI * b.reduce((sum, value, i) => sum + value * pressure[i]!.im, 0)
    }
    // A dipole of moment rho omega^2 (8/3) R^3 radiates k^3 (8/3)^2/(12 pi) as imaginary mass: Lamb § 290.
    expect(loss(0.1) / (0.1 ** 3 * (8 / 3) ** 2 / (12 * Math.PI))).toBeCloseTo(1, 1) // next term is of order kappa^2 = 1 %
  })

  it('loads a film in free air less than one in a baffle, mode by mode', () => {
    for (const m of [0, 1, 3, 6]) {
      for (const kappa of [0.05, 0.8]) {
        const free = readAirTable(freeDiscTables()[m]!, c(kappa))
        const baffled = readAirTable(halfSpaceTables()[m]!, c(kappa))
        for (let n = 0; n < 4; n++) {
          const at = n * (BASIS + 1)
          expect(free.re[at]!).toBeLessThan(2 * baffled.re[at]!)
          expect(free.re[at]!).toBeGreaterThan(2 * baffled.re[at]! * 0.5)
        }
      }
    }
  })

  it('needs no more shapes than it has: five or seven give the same low modes', () => {
    // sigma = 0.35 kg/m2, rho R = 0.2 kg/m2: a light, wide head, the hard case.
    const table = readAirTable(halfSpaceTables()[0]!, c(0.6))
    const zeros = zerosOfJ(0, BASIS)
    const lowest = (size: number): number[] => {
      const mass = Matrix.zeros(size, size)
      for (let i = 0; i < size; i++) {
        for (let j = 0; j < size; j++) mass.set(i, j, (i === j ? 0.35 : 0) + 0.2 * (table.re[i * BASIS + j]! + table.re[j * BASIS + i]!))
      }
      const half = inverse(new CholeskyDecomposition(mass).lowerTriangularMatrix)
      const stiffness = Matrix.diag(zeros.slice(0, size).map(alpha => alpha ** 2))
      const evd = new EigenvalueDecomposition(half.mmul(stiffness).mmul(half.transpose()), { assumeSymmetric: true })
      return evd.realEigenvalues.sort((a, b) => a - b).map(value => Math.sqrt(value))
    }
    const few = lowest(5)
    const many = lowest(7)
    expect(few[0]! / many[0]!).toBeCloseTo(1, 4) // Ritz error falls fast for (0,1)
    expect(few[1]! / many[1]!).toBeCloseTo(1, 3) // and to 0.05 % for (0,2)
  })
})

describe('shell air of the simulated drum', () => {
  it('is the spring rho c^2/V of a closed volume plus a third of its air at low frequency', () => {
    const k0 = 0.01
    const { self, across } = closedTube(0, 0.2, 0.3, c(k0))
    expect(self.re).toBeCloseTo(-1 / (k0 ** 2 * 0.3) + 0.3 / 3, 5) // series of cot; next term L^3 k0^2/45
    expect(self.re - across.re).toBeCloseTo(0.3 / 2, 5) // two heads moving alike share rho L
  })

  it('is a plug of length L + 0.61 R in an open tube at low frequency', () => {
    const factor = openTube(0, 0.2, 0.3, c(0.01))
    expect(factor.re).toBeCloseTo(0.3 + 0.6133 * 0.2, 4) // Source: Levine & Schwinger (1948); order k0^2
    expect(factor.im).toBeCloseTo(0.01 * 0.2 ** 2 / 4, 5) // unflanged mouth resistance (ka)^2/4, same source
  })

  it('carries cross modes as tanh(L b/R) R/b and coth(L b/R) R/b at low frequency', () => {
    const b = 1.8412
    expect(openTube(b, 0.2, 0.05, c(1e-4)).re).toBeCloseTo(Math.tanh(b / 4) * 0.2 / b, 8) // rounding and k0^2 = 1e-8
    expect(closedTube(b, 0.2, 0.05, c(1e-4)).self.re).toBeCloseTo(0.2 / b / Math.tanh(b / 4), 8) // same
  })
})
