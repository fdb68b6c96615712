import { GroupMatrices, type GroupState } from './groupMatrices'
import type { GroupAir } from './constructionAir'
import { generalisedEigen, solveInPlace } from './linearAlgebra'
import { describeMode, quadratic, type EigenPair } from './modeDescription'
import type { PredictedMode } from './types'

/** Relative change of frequency at which a mode counts as found. */
const CONVERGED = 1e-10
const MOST_ROUNDS = 12
/** Rounds before the shape is touched: the frequency alone follows the air's mass. */
const ROUGH_ROUNDS = 2

/** Frequency and shape of one mode with the air's mass taken at the mode's own frequency: Rayleigh quotient iteration. */
function selfConsistent(matrices: GroupMatrices, start: EigenPair, mostRounds: number): EigenPair {
  const { size, stiffness, workA: mass, workB: shifted } = matrices
  let x = start.x
  let square = start.omegaSquared
  for (let round = 0; round < mostRounds; round++) {
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
function followByOverlap(matrices: GroupMatrices, start: EigenPair): EigenPair {
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

export interface GroupOptions { maxHz: number, rough?: boolean, airModes?: boolean }

/**
 * Modes of one m with air, bending, edge, cavity and coupling: each at its own self-consistent frequency.
 *
 * Source: physics.md sections 2 to 4; Rayleigh quotient iteration: Golub & Van Loan, section 8.2.
 * @param air    the air of the construction for this m
 * @param state  heads, radius, air and scales
 * @param options.maxHz  modes above are left out, Hz
 * @param options.rough  shapes stay those of a middling frequency: frequencies are then good to 0.1 % and decay rates to a tenth
 * @param options.airModes  give the air's own resonances too
 */
export function groupModes(air: GroupAir, state: GroupState, { maxHz, rough = false, airModes = false }: GroupOptions): PredictedMode[] {
  const matrices = new GroupMatrices(air, state)
  const { size, stiffness } = matrices
  const mass = new Float64Array(size * size)
  // A middling frequency for the first guess: the second mode as if the air were still.
  const guess = Math.sqrt(matrices.headStiffness[Math.min(1, air.basis.count - 1)]! / (state.heads[0]!.film.arealDensityKgM2 * 1.5))
  matrices.massAt(guess, mass)
  const { values, vectors } = generalisedEigen(size, stiffness, mass)
  const starts: EigenPair[] = []
  for (let c = 0; c < size; c++) {
    const x = new Float64Array(size)
    for (let i = 0; i < size; i++) x[i] = vectors[i * size + c]!
    starts.push({ omegaSquared: Math.max(values[c]!, 1), x })
  }
  starts.sort((a, b) => a.omegaSquared - b.omegaSquared)
  const pairs: EigenPair[] = []
  for (const start of starts) {
    if (Math.sqrt(start.omegaSquared) > 1.2 * 2 * Math.PI * maxHz) break
    let pair = selfConsistent(matrices, start, rough ? ROUGH_ROUNDS : MOST_ROUNDS)
    if (rough) {
      pairs.push(pair)
      continue
    }
    const known = pairs.some(p => Math.abs(p.omegaSquared / pair.omegaSquared - 1) < 1e-7 && Math.abs(quadratic(size, mass, p.x, pair.x)) > 0.9)
    if (known || Math.abs(quadratic(size, mass, start.x, pair.x)) < 0.7) pair = followByOverlap(matrices, start)
    pairs.push(pair)
  }
  const { modes, rest } = label(matrices, pairs, rough ? [] : starts, rough)
  if (airModes) modes.push(...airResonances(matrices, rest))
  return modes.filter(mode => mode.frequencyHz <= maxHz)
}

/** A mode is not named after a shape that holds less than this of what its strongest shape holds. */
const LEAST_CLAIM = 0.1

/** Gives every shape of every head the mode that moves it most; the rest are the air's own. */
function label(matrices: GroupMatrices, pairs: EigenPair[], starts: EigenPair[], rough: boolean): { modes: PredictedMode[], rest: EigenPair[] } {
  const { shapes } = matrices
  const claims: Array<{ pair: EigenPair, shape: number, share: number }> = []
  for (const pair of pairs) {
    // By the film's own energy in that shape: where the shell's air takes part, the head's mode is the one that strains the film.
    const shares = Array.from({ length: shapes }, (_, i) => pair.x[i]! ** 2 * matrices.headStiffness[i]! / pair.omegaSquared)
    const most = Math.max(...shares)
    shares.forEach((share, shape) => {
      if (share > LEAST_CLAIM * most) claims.push({ pair, shape, share })
    })
  }
  // Two like heads share each mode evenly: then the lower one is the struck head's.
  claims.sort((a, b) => Math.abs(a.share - b.share) > 1e-6 ? b.share - a.share : a.pair.omegaSquared - b.pair.omegaSquared || a.shape - b.shape)
  const usedPairs = new Set<EigenPair>()
  const usedShapes = new Set<number>()
  const modes: PredictedMode[] = []
  for (const claim of claims) {
    if (usedPairs.has(claim.pair) || usedShapes.has(claim.shape)) continue
    usedPairs.add(claim.pair)
    usedShapes.add(claim.shape)
    modes.push(describeMode(matrices, claim.pair, claim.shape, starts, rough))
  }
  return { modes, rest: pairs.filter(pair => !usedPairs.has(pair)) }
}

/** An air resonance with less of its energy in the films is not heard through them. */
const LEAST_FILM_SHARE = 0.003

/** The air's own resonances as modes without a number of nodal circles. */
function airResonances(matrices: GroupMatrices, rest: EigenPair[]): PredictedMode[] {
  const { shapes } = matrices
  const found: PredictedMode[] = []
  for (const pair of [...rest].sort((a, b) => a.omegaSquared - b.omegaSquared)) {
    const energies = Array.from({ length: shapes }, (_, i) => pair.x[i]! ** 2 * matrices.headStiffness[i]! / pair.omegaSquared)
    const filmShare = energies.reduce((sum, share) => sum + share, 0)
    if (filmShare < LEAST_FILM_SHARE) continue
    const strongest = energies.indexOf(Math.max(...energies))
    found.push({ ...describeMode(matrices, pair, strongest, [], true), n: 0, air: { index: found.length, filmShare } })
  }
  return found
}
