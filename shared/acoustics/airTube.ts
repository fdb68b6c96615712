import { KAPPA_ROWS, KAPPA_STEP, emptyAirTable, type AirTable } from './airTable'
import { crossModeOverlap, shapeBasis } from './basis'
import { besselPrimeZero } from './besselZeros'
import { tubeImpedance } from './tubeImpedance'

/** Cross modes kept per m; the rest add less than 1e-5 of the mass. */
const CROSS_MODES = 24
/** Loss factor of a followed resonance: walls and leaks of a hard tube. */
const AIR_LOSS_FACTOR = 0.01
/** Loss factor for resonances that are not followed one by one; wide enough for the table's grid. */
const BLUNT_LOSS_FACTOR = 0.1
/** Resonances whose static mass on every shape is below this, in units of rho0 R, split a head's mode by less than its width. */
const LEAST_COUPLING = 0.004
/** Resonances of the tube below this kappa0 become unknowns of their own; 6 is 1000 Hz in a kettle, 2000 Hz in a tom. */
const RESONANCE_LIMIT = 6
const MOST_RESONANCES = 6
/** Open end's length correction, unflanged: 0.61 R (Levine & Schwinger, Phys. Rev. 73 (1948) 383). */
export const OPEN_END_CORRECTION = 0.61

/** One resonance of the enclosed air: a unit mass on a spring to the heads' displacement along `coupling`. */
export interface AirResonance {
  /** omega R / c0 of the resonance with the heads held still. */
  kappa: number
  /** sqrt of its static mass on shape n, in units of sqrt(rho0 R). */
  coupling: Float64Array
  /** Sign on the other head of a closed tube: the pressure there against that at the struck head, for displacement the same way. */
  otherSign: 1 | -1
  lossFactor: number
}

/** Air inside the shell for one m, in units of rho0 R. */
export interface TubeAir {
  own: AirTable
  /** Between the two heads of a closed tube, both moving the same way; the sign is included. */
  cross?: AirTable
  resonances: AirResonance[]
  /** Closed tube, m = 0: overlap of each shape with the plane wave; the spring is rho0 c0^2 / (lambda R) times its square. */
  springOverlap?: Float64Array
}

interface Candidate extends AirResonance { q: number, staticMass: number }

/**
 * Air inside a shell for one m: an open tube (one head) or a closed one (a kettle, or two heads), as pure numbers.
 *
 * Each rigid-wall cross mode b_mq of the tube (for m = 0 also the plane wave) carries, with k^2 = b^2 - kappa0^2,
 *
 *   open: tanh(k lambda)/k    closed: coth(k lambda)/k    between two heads: -1/(k sinh(k lambda))
 *
 * The tube's resonances below kappa0 = 6 are taken out as partial fractions and returned one by one, because near one the
 * head's and the air's motion are two modes and not one frequency-dependent mass; the closed plane wave's 1/kappa0^2 part is
 * the cavity's spring.
 * @param m       nodal diameters
 * @param lambda  L/R, depth by radius, >= 0
 * @param closed  the far end is shut (by a bowl or another head)
 * Source: Morse & Ingard, Theoretical Acoustics, ch. 9; Rossing et al., J. Acoust. Soc. Am. 92 (1992) 84; partial
 * fractions DLMF 4.36.3 to 4.36.5.
 */
export function tubeAir(m: number, lambda: number, closed: boolean): TubeAir {
  const basis = shapeBasis(m)
  const depth = Math.max(lambda, 0.02)
  const own = emptyAirTable(basis.count)
  const cross = closed ? emptyAirTable(basis.count) : undefined
  const candidates: Candidate[] = []
  for (let q = m === 0 ? 0 : 1; q <= CROSS_MODES; q++) {
    const length = q === 0 && !closed ? depth + OPEN_END_CORRECTION : depth
    const overlap = Float64Array.from(basis.zeros, zero => crossModeOverlap(m, zero, q))
    candidates.push(...resonancesOf(m, q, length, closed, overlap))
  }
  const strength = (r: Candidate) => Math.max(...r.coupling.map(Math.abs)) ** 2
  const strong = candidates.filter(r => strength(r) > LEAST_COUPLING).sort((a, b) => strength(b) - strength(a))
  const resonances = strong.slice(0, MOST_RESONANCES).sort((a, b) => a.kappa - b.kappa)
  for (let q = m === 0 ? 0 : 1; q <= CROSS_MODES; q++) {
    const b = q === 0 ? 0 : besselPrimeZero(m, q)
    const length = q === 0 && !closed ? depth + OPEN_END_CORRECTION : depth
    const overlap = Float64Array.from(basis.zeros, zero => crossModeOverlap(m, zero, q))
    const taken = resonances.filter(r => r.q === q).map(r => ({ kappa: r.kappa, weight: r.staticMass * r.kappa ** 2, otherSign: r.otherSign }))
    for (let row = 0; row < KAPPA_ROWS; row++) {
      const air = tubeImpedance({ b, length, closed, kappa0: row * KAPPA_STEP, lossFactor: BLUNT_LOSS_FACTOR, taken })
      addOuter(own, row, overlap, air.own)
      if (cross) addOuter(cross, row, overlap, air.cross)
    }
  }
  return {
    own, cross, resonances,
    springOverlap: closed && m === 0 ? Float64Array.from(basis.zeros, zero => crossModeOverlap(0, zero, 0)) : undefined,
  }
}

function addOuter(table: AirTable, row: number, overlap: Float64Array, mass: number): void {
  for (let n = 0, at = row * table.width; n < overlap.length; n++) {
    for (let k = 0; k <= n; k++, at++) {
      const product = overlap[n]! * overlap[k]!
      table.mass[at] = table.mass[at]! + product * mass
    }
  }
}

/** Resonances of one cross mode below the limit; the closed plane wave's j = 0 is the spring and is left out. */
function resonancesOf(m: number, q: number, length: number, closed: boolean, overlap: Float64Array): Candidate[] {
  const b = q === 0 ? 0 : besselPrimeZero(m, q)
  const found: Candidate[] = []
  for (let j = closed ? (q === 0 ? 1 : 0) : 1; ; j++) {
    const axial = (closed ? j : j - 0.5) * Math.PI / length
    const kappa = Math.hypot(b, axial)
    if (kappa > RESONANCE_LIMIT) break
    const staticMass = (j === 0 ? 1 : 2) / (length * kappa * kappa)
    found.push({
      q, kappa, staticMass,
      coupling: overlap.map(c => c * Math.sqrt(staticMass)),
      otherSign: j % 2 === 0 ? -1 : 1,
      // The open end reflects 1 - kappa^2 / 2 of the wave every 2 L', which is eta = kappa R / (2 L').
      lossFactor: q === 0 && !closed ? kappa / (2 * length) : AIR_LOSS_FACTOR,
    })
  }
  return found
}
