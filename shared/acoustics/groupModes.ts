import { GroupMatrices, type GroupState } from './groupMatrices'
import type { GroupAir } from './constructionAir'
import { idealFrequencyHz } from './idealMembrane'
import { generalisedEigen, solveInPlace } from './linearAlgebra'
import type { PredictedMode } from './types'

interface Pair { omegaSquared: number, x: Float64Array }

/** Relative change of frequency at which a mode counts as found. */
const CONVERGED = 1e-10
const MOST_ROUNDS = 12

function quadratic(size: number, matrix: Float64Array, x: Float64Array, y: Float64Array): number {
  let sum = 0
  for (let i = 0; i < size; i++) {
    let row = 0
    for (let j = 0; j < size; j++) row += matrix[i * size + j]! * x[j]!
    sum += row * y[i]!
  }
  return sum
}

/** Frequency and shape of one mode with the air's mass taken at the mode's own frequency: Rayleigh quotient iteration. */
function selfConsistent(matrices: GroupMatrices, start: Pair): Pair {
  const { size, stiffness, workA: mass, workB: shifted } = matrices
  let x = start.x
  let square = start.omegaSquared
  for (let round = 0; round < MOST_ROUNDS; round++) {
    matrices.massAt(Math.sqrt(square), mass)
    if (round >= 2) {
      const next = new Float64Array(size)
      for (let i = 0; i < size; i++) {
        let sum = 0
        for (let j = 0; j < size; j++) sum += mass[i * size + j]! * x[j]!
        next[i] = sum
      }
      for (let i = 0; i < shifted.length; i++) shifted[i] = stiffness[i]! - square * mass[i]!
      solveInPlace(size, shifted, next)
      const norm = Math.sqrt(quadratic(size, mass, next, next))
      x = next.map(v => v / norm)
    }
    const better = quadratic(size, stiffness, x, x) / quadratic(size, mass, x, x)
    const change = Math.abs(better - square) / square
    square = better
    if (round >= 2 && change < CONVERGED) break
  }
  return { omegaSquared: square, x }
}

/** The eigenpair at a fixed frequency's mass that is most like a given one: for modes that iteration has led astray. */
function followByOverlap(matrices: GroupMatrices, start: Pair): Pair {
  const { size, stiffness } = matrices
  const mass = new Float64Array(size * size)
  let pair = start
  for (let round = 0; round < 6; round++) {
    matrices.massAt(Math.sqrt(pair.omegaSquared), mass)
    const { values, vectors } = generalisedEigen(size, stiffness, mass)
    let best = -1
    let bestPair = pair
    for (let c = 0; c < size; c++) {
      const x = new Float64Array(size)
      for (let i = 0; i < size; i++) x[i] = vectors[i * size + c]!
      const overlap = Math.abs(quadratic(size, mass, x, start.x))
      if (overlap > best) {
        best = overlap
        bestPair = { omegaSquared: values[c]!, x }
      }
    }
    pair = bestPair
  }
  return pair
}

/**
 * Modes of one m with air, bending, edge, cavity and coupling: each at its own self-consistent frequency.
 *
 * Source: physics.md sections 2 to 4; Rayleigh quotient iteration: Golub & Van Loan, section 8.2.
 * @param air    the air of the construction for this m
 * @param state  heads, radius, air and scales
 * @param maxHz  modes above are left out, Hz
 */
export function groupModes(air: GroupAir, state: GroupState, maxHz: number): PredictedMode[] {
  const matrices = new GroupMatrices(air, state)
  const { size, stiffness } = matrices
  const mass = new Float64Array(size * size)
  // A middling frequency for the first guess: the second mode as if the air were still.
  const guess = Math.sqrt(matrices.headStiffness[Math.min(1, air.basis.count - 1)]! / (state.heads[0]!.film.arealDensityKgM2 * 1.5))
  matrices.massAt(guess, mass)
  const { values, vectors } = generalisedEigen(size, stiffness, mass)
  const starts: Pair[] = []
  for (let c = 0; c < size; c++) {
    const x = new Float64Array(size)
    for (let i = 0; i < size; i++) x[i] = vectors[i * size + c]!
    starts.push({ omegaSquared: Math.max(values[c]!, 1), x })
  }
  starts.sort((a, b) => a.omegaSquared - b.omegaSquared)
  const pairs: Pair[] = []
  for (const start of starts) {
    if (Math.sqrt(start.omegaSquared) > 1.2 * 2 * Math.PI * maxHz) break
    let pair = selfConsistent(matrices, start)
    const known = pairs.some(p => Math.abs(p.omegaSquared / pair.omegaSquared - 1) < 1e-7 && Math.abs(quadratic(size, mass, p.x, pair.x)) > 0.9)
    if (known || Math.abs(quadratic(size, mass, start.x, pair.x)) < 0.7) pair = followByOverlap(matrices, start)
    pairs.push(pair)
  }
  return label(matrices, pairs).filter(mode => mode.frequencyHz <= maxHz)
}

/** Gives every shape of every head the mode that moves it most; the air's own modes stay unnamed and are left out. */
function label(matrices: GroupMatrices, pairs: Pair[]): PredictedMode[] {
  const { shapes } = matrices
  const claims: Array<{ pair: Pair, shape: number, share: number }> = []
  for (const pair of pairs) {
    for (let i = 0; i < shapes; i++) claims.push({ pair, shape: i, share: pair.x[i]! ** 2 * headDensity(matrices, i) })
  }
  // Two like heads share each mode evenly: then the lower one is the struck head's.
  claims.sort((a, b) => Math.abs(a.share - b.share) > 1e-6 ? b.share - a.share : a.pair.omegaSquared - b.pair.omegaSquared || a.shape - b.shape)
  const usedPairs = new Set<Pair>()
  const usedShapes = new Set<number>()
  const modes: PredictedMode[] = []
  for (const claim of claims) {
    if (usedPairs.has(claim.pair) || usedShapes.has(claim.shape) || claim.share < 0.02) continue
    usedPairs.add(claim.pair)
    usedShapes.add(claim.shape)
    modes.push(describe(matrices, claim.pair, claim.shape))
  }
  return modes
}

function headDensity(matrices: GroupMatrices, shape: number): number {
  return matrices.state.heads[shape < matrices.air.basis.count ? 0 : 1]!.film.arealDensityKgM2
}

function describe(matrices: GroupMatrices, pair: Pair, shape: number): PredictedMode {
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
  let loss = quadratic(size, work, x, x)
  work.fill(0)
  matrices.fillAir(omega, work, 'mass', false, state.airScale)
  let byAirStiffness = 0
  const byAirMass = quadratic(size, work, x, x)
  for (let a = 0; a < air.resonances.length; a++) {
    let moved = 0
    for (let i = 0; i < shapes; i++) moved += matrices.coupling[a * shapes + i]! * x[i]!
    const y = x[shapes + a]!
    byAirStiffness += matrices.resonanceSquared[a]! * moved * (moved - y)
    loss += air.resonances[a]!.lossFactor * y * y
  }
  const perHead = [0, 0]
  let byEdge = 0
  let bySigma = 0
  let amplitudeSquared = 0
  let headStiffness = 0
  for (let i = 0; i < shapes; i++) {
    const square = x[i]! ** 2
    perHead[i < count ? 0 : 1]! += square * matrices.tensionSlope[i]!
    byEdge += square * matrices.edgeSlope[i]!
    bySigma += square * headDensity(matrices, i)
    headStiffness += square * matrices.headStiffness[i]!
    amplitudeSquared += square
  }
  // From x^T K x = omega^2 x^T M(omega) x: d ln omega = (dk - omega^2 dm) / (omega^2 (2 m + dm / d ln omega)).
  const denominator = omegaSquared * (2 * inertia + inertiaSlope)
  const scale = 1 / Math.sqrt(amplitudeSquared)
  const head = shape < count ? 0 : 1
  const film = state.heads[head]!
  const n = (shape % count) + 1
  return {
    m: air.basis.m,
    n,
    head: head === 0 ? 'struck' : 'other',
    frequencyHz: omega / (2 * Math.PI),
    idealHz: idealFrequencyHz({ radiusM: state.radiusM, arealDensityKgM2: film.film.arealDensityKgM2, tensionNPerM: film.tensionNPerM }, air.basis.m, n),
    addedMassKgM2: (headStiffness / omegaSquared - bySigma) / amplitudeSquared,
    radiationDampingPerS: omega * loss / (2 * inertia + inertiaSlope),
    struckShape: x.slice(0, count).map(v => v * scale),
    otherShape: shapes > count ? x.slice(count, shapes).map(v => v * scale) : new Float64Array(0),
    sensitivity: {
      lnTension: perHead[0]! / denominator,
      lnOtherTension: perHead[1]! / denominator,
      lnAirScale: (byAirStiffness - omegaSquared * byAirMass) / denominator,
      lnArealDensity: -omegaSquared * bySigma / denominator,
      edgeFactor: byEdge / denominator,
    },
  }
}
