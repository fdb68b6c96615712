import type { GroupMatrices } from './groupMatrices'
import { idealFrequencyHz } from './idealMembrane'
import type { PredictedMode } from './types'

/** One solution of K x = omega^2 M x. */
export interface EigenPair { omegaSquared: number, x: Float64Array }

/** y^T A x for a row-major matrix, in the units of its factors' product. Source: definition of a quadratic form. */
export function quadratic(size: number, matrix: Float64Array, x: Float64Array, y: Float64Array): number {
  let sum = 0
  for (let i = 0; i < size; i++) {
    let row = 0
    for (let j = 0; j < size; j++) row += matrix[i * size + j]! * x[j]!
    sum += row * y[i]!
  }
  return sum
}

interface Radiation {
  mass: number
  massSlope: number
  loss: number
  lossSlope: number
  coupled: { mass: number, loss: number }
}

/**
 * Complex frequency of a mode that radiates, from its lossless solution, by omega0: exp(u), u complex.
 *
 * The decay and the frequency dependence of the air act together: exp(2u) (m + m' u - i (l + l' u) + coupled) = m, with m and l mass and
 * loss at omega0 and the primes derivatives by ln omega. Newton's method from u = 0; the shape is kept.
 */
function radiatingFrequency({ mass, massSlope, loss, lossSlope, coupled }: Radiation): { real: number, imaginary: number } {
  let re = 0
  let im = 0
  for (let round = 0; round < 6; round++) {
    const a = mass + coupled.mass + massSlope * re + lossSlope * im
    const b = massSlope * im - loss - coupled.loss - lossSlope * re
    const size = Math.exp(2 * re)
    const [c, s] = [size * Math.cos(2 * im), size * Math.sin(2 * im)]
    const fRe = c * a - s * b - mass
    const fIm = c * b + s * a
    // f' = exp(2u) (2 (a + i b) + m' - i l')
    const [pRe, pIm] = [2 * a + massSlope, 2 * b - lossSlope]
    const [dRe, dIm] = [c * pRe - s * pIm, c * pIm + s * pRe]
    const norm = dRe * dRe + dIm * dIm
    re -= (fRe * dRe + fIm * dIm) / norm
    im -= (fIm * dRe - fRe * dIm) / norm
  }
  return { real: Math.exp(re) * Math.cos(im), imaginary: Math.exp(re) * Math.sin(im) }
}

/** Areal density of the head that a shape belongs to, kg/m2. Source: the drum model's own matrices. */
export function headDensity(matrices: GroupMatrices, shape: number): number {
  return matrices.state.heads[shape < matrices.air.basis.count ? 0 : 1]!.film.arealDensityKgM2
}

/**
 * What the other modes add to one mode's mass and loss because the air's loss couples them, per modal mass:
 * m - i l - omega^2 sum_j L_ij^2 / (omega_j^2 - omega^2 + i omega^2 L_jj), L the loss matrix on the modes.
 */
function coupledLoss(matrices: GroupMatrices, pair: EigenPair, others: EigenPair[], lossMatrix: Float64Array): { mass: number, loss: number } {
  const { size } = matrices
  let mass = 0
  let loss = 0
  for (const other of others) {
    const detuning = other.omegaSquared - pair.omegaSquared
    // The mode itself, as it stood in the first guess, is no neighbour.
    if (Math.abs(overlap(matrices, pair.x, other.x)) > 0.7) continue
    const across = quadratic(size, lossMatrix, pair.x, other.x)
    const own = pair.omegaSquared * quadratic(size, lossMatrix, other.x, other.x)
    const factor = pair.omegaSquared * across * across / (detuning * detuning + own * own)
    mass -= factor * detuning
    loss -= factor * own
  }
  // Second order holds only while it is small against the first.
  const most = 0.5 * quadratic(size, lossMatrix, pair.x, pair.x)
  const shrink = Math.min(1, most / Math.max(Math.hypot(mass, loss), 1e-300))
  return { mass: mass * shrink, loss: loss * shrink }
}

/** Overlap weighted by the film's own mass: enough to tell which mode is which. */
function overlap(matrices: GroupMatrices, x: Float64Array, y: Float64Array): number {
  let xy = 0
  let xx = 0
  let yy = 0
  for (let i = 0; i < matrices.size; i++) {
    const weight = i < matrices.shapes ? headDensity(matrices, i) : 1
    xy += weight * x[i]! * y[i]!
    xx += weight * x[i]! ** 2
    yy += weight * y[i]! ** 2
  }
  return xy / Math.sqrt(xx * yy)
}

function slopeOfLoss(matrices: GroupMatrices, { omegaSquared, x }: EigenPair): number {
  const work = matrices.workA
  work.fill(0)
  matrices.fillAir(Math.sqrt(omegaSquared), work, 'loss', true, matrices.state.airScale)
  return quadratic(matrices.size, work, x, x)
}

/**
 * All that is known of one mode: frequency with and without radiation, decay, added mass, shape, sensitivities.
 *
 * Source: first-order change of an eigenvalue, d(omega^2) = x^T (dK - omega^2 dM) x (Rayleigh, The Theory of Sound, vol. 1, ch. 4).
 * @param pair    lossless angular frequency squared and shape, normalised to x^T M x = 1
 * @param shape   number of the shape that names the mode, heads one after the other
 * @param others  first guesses of all modes of the same m
 * @param rough   leave out how the loss changes with frequency: a tenth of the decay rate
 */
export function describeMode(matrices: GroupMatrices, pair: EigenPair, shape: number, others: EigenPair[], rough = false): PredictedMode {
  const { air, state, size, shapes } = matrices
  const count = air.basis.count
  const { x, omegaSquared } = pair
  const omega = Math.sqrt(omegaSquared)
  const work = matrices.workA
  matrices.massAt(omega, work)
  const inertia = quadratic(size, work, x, x)
  work.fill(0)
  matrices.fillAir(omega, work, 'mass', true, state.airScale)
  const inertiaSlope = quadratic(size, work, x, x)
  work.fill(0)
  matrices.fillAir(omega, work, 'loss', false, state.airScale)
  // A resonance's loss is that of its mass seen from the head, which rises as omega^2 below the resonance.
  for (let a = 0; a < air.resonances.length; a++) {
    work[(shapes + a) * (size + 1)] = air.resonances[a]!.lossFactor * omegaSquared / matrices.resonanceSquared[a]!
  }
  const loss = quadratic(size, work, x, x)
  const coupled = coupledLoss(matrices, pair, others, work)
  const lossSlope = rough ? 0 : slopeOfLoss(matrices, pair)
  let byAirStiffness = 0
  for (let a = 0; a < air.resonances.length; a++) {
    let moved = 0
    for (let i = 0; i < shapes; i++) moved += matrices.coupling[a * shapes + i]! * x[i]!
    byAirStiffness += matrices.resonanceSquared[a]! * moved * (moved - x[shapes + a]!)
  }
  const perHead = [0, 0]
  let byEdge = 0
  const byDensity = [0, 0]
  let amplitudeSquared = 0
  let headStiffness = 0
  for (let i = 0; i < shapes; i++) {
    const square = x[i]! ** 2
    perHead[i < count ? 0 : 1]! += square * matrices.tensionSlope[i]!
    byEdge += square * matrices.edgeSlope[i]!
    byDensity[i < count ? 0 : 1]! += square * headDensity(matrices, i)
    headStiffness += square * matrices.headStiffness[i]!
    amplitudeSquared += square
  }
  let byAirMass = inertia - byDensity[0]! - byDensity[1]!
  for (let i = shapes; i < size; i++) byAirMass -= x[i]! ** 2
  // From x^T K x = omega^2 x^T M(omega) x: d ln omega = (dk - omega^2 dm) / (omega^2 (2 m + dm / d ln omega)).
  const denominator = omegaSquared * (2 * inertia + inertiaSlope)
  const scale = 1 / Math.sqrt(amplitudeSquared)
  const radiating = radiatingFrequency({ mass: inertia, massSlope: inertiaSlope, loss, lossSlope, coupled })
  const head = shape < count ? 0 : 1
  const film = state.heads[head]!
  const n = (shape % count) + 1
  return {
    m: air.basis.m,
    n,
    head: head === 0 ? 'struck' : 'other',
    frequencyHz: omega * Math.hypot(radiating.real, radiating.imaginary) / (2 * Math.PI),
    losslessHz: omega / (2 * Math.PI),
    idealHz: idealFrequencyHz({ radiusM: state.radiusM, arealDensityKgM2: film.film.arealDensityKgM2, tensionNPerM: film.tensionNPerM }, air.basis.m, n),
    addedMassKgM2: (headStiffness / omegaSquared - byDensity[0]! - byDensity[1]!) / amplitudeSquared,
    radiationDampingPerS: omega * radiating.imaginary,
    struckShape: x.slice(0, count).map(v => v * scale),
    otherShape: shapes > count ? x.slice(count, shapes).map(v => v * scale) : new Float64Array(0),
    sensitivity: {
      lnTension: perHead[0]! / denominator,
      lnOtherTension: perHead[1]! / denominator,
      lnAirScale: (byAirStiffness - omegaSquared * byAirMass) / denominator,
      lnArealDensity: -omegaSquared * byDensity[0]! / denominator,
      lnOtherArealDensity: -omegaSquared * byDensity[1]! / denominator,
      edgeFactor: byEdge / denominator,
    },
  }
}
