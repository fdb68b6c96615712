import type { PredictedMode } from '../../../shared/acoustics'
import type { MicrophoneKind } from './parameters'
import { fitRim, type RimFit, type RimPrior } from './rimFit'
import type { RimProblem } from './rimModel'
import { basisFor, binsAround, freeUnknowns, rimPrior, rimProblem } from './rimProblem'
import { findPairs, harmonicOf } from './rimStart'
import type { RoundSpectra } from './roundSpectra'

/** What is asked: the round's spectra, the rod of each tap, and the even head's modes at about its mean tension. */
export interface RimQuestion {
  spectra: RoundSpectra
  rodCount: number
  /** Rod of each tap, from 0. */
  rods: number[]
  modes: PredictedMode[]
}

/** The rim of a head: harmonics of its edge tension about the mean, with what is known of them. */
export interface RimAnswer {
  /** N(theta) / N_0 - 1 at each rod. */
  deviation: Float64Array
  /** Standard deviation of each. */
  standard: Float64Array
  /** How far the pairs stand from the modes that were given, ln of frequency: the mean tension is off by twice this. */
  lnFrequency: number
  microphone: MicrophoneKind
  misfit: number
  /** Steps that the fit took. */
  rounds: number
}

/** Families heard and weighed, step by step from the lowest pairs to all. */
const STAGES = [
  { heard: 5, weighed: 8, rounds: 14, modelError: 0.08 },
  { heard: 9, weighed: 14, rounds: 12, modelError: 0.05 },
  { heard: 13, weighed: 20, rounds: 16, modelError: 0.04 },
]
const LAST = STAGES.at(-1)!
const ROOM_SHARE = 0.08
/** A pair split by less than this many line widths is left even at the start. */
const RESOLVED = 0.6
const TINY = 1e-6

/** Reads the rim from a round: pairs first, then one model of all taps together, growing from few families to many. */
export function readRim(question: RimQuestion): RimAnswer {
  const { spectra, rodCount, rods, modes } = question
  const basis = basisFor(modes, rodCount, LAST)
  const rodAngles = Float64Array.from(rods, rod => 2 * Math.PI * rod / rodCount)
  const tries = (['fixed', 'following'] as const).map((microphone) => {
    const problem = rimProblem(spectra, basis, rodAngles, microphone)
    const prior = rimPrior(basis, problem.map)
    const x = startOf(problem, prior)
    return { problem, prior, fit: stage(problem, prior, x, STAGES[0]!, true) }
  })
  const best = tries.reduce((a, b) => (b.fit.cost < a.fit.cost ? b : a))
  let { fit } = best
  for (const step of STAGES.slice(1)) fit = stage(best.problem, best.prior, fit.x, step, false)
  return answerOf(best.problem, fit, rodCount)
}

function startOf(problem: RimProblem, prior: RimPrior): Float64Array {
  const { basis, map, spectra } = problem
  const x = prior.mean.slice()
  const offsets: number[] = []
  for (const m of [1, 2, 3]) {
    const family = basis.families.findIndex(f => f.m === m && f.n === 1)
    const { omega } = basis.families[family]!
    const gamma = Math.exp(x[map.decays + family]!)
    const shift = offsets[0] ?? 0
    const centre = omega * Math.exp(shift) / (2 * Math.PI)
    const [pair] = findPairs(problem, family, centre, gamma)
    if (!pair) continue
    const width = (gamma + spectra.windowPerS) / Math.PI
    const split = pair.highHz - pair.lowHz
    // A wide split of a higher pair is more often a neighbour than the head.
    if (m === 1 || split < 0.04 * centre) offsets.push(Math.log(Math.PI * (pair.lowHz + pair.highHz) / omega))
    if (split < RESOLVED * width || (m > 1 && split > 0.04 * centre) || pair.antinodes.length === 0) continue
    const found = harmonicOf(problem, pair, pair.antinodes[0]!)
    if (!found) continue
    x[map.harmonics + 2 * (found.k - 2)] = found.cos
    x[map.harmonics + 2 * (found.k - 2) + 1] = found.sin
  }
  const offset = offsets[0] ?? 0
  for (let j = 0; j < map.familyCount; j++) {
    x[map.frequencies + j] = offset
    prior.mean[map.frequencies + j] = offset
  }
  return x
}

function stage(problem: RimProblem, prior: RimPrior, from: Float64Array, step: typeof STAGES[number], first: boolean): RimFit {
  const { map } = problem
  const free = freeUnknowns(problem, step.weighed)
  const x = from.slice()
  problem.bins = binsAround(problem, x, step.heard)
  const weight = (column: number) => column >= map.weights && column < map.taps && free(column)
  const options = { roomShare: ROOM_SHARE, modelError: step.modelError, settled: 2e-4 }
  for (let w = map.weights; w < map.taps; w += 2) if (free(w) && x[w] === 0) x[w] = TINY
  let fit = fitRim(problem, x, prior, { ...options, mostRounds: 4, wanted: weight })
  scaleWeights(problem, prior, fit.x, weight)
  if (first) fit = fitRim(problem, fit.x, prior, { ...options, mostRounds: 6, wanted: column => column >= map.decays && free(column) })
  return fitRim(problem, fit.x, prior, { ...options, mostRounds: step.rounds, wanted: free })
}

/** What the microphone hears of any shape is not much more than what it hears of the loud ones. */
function scaleWeights({ map }: RimProblem, prior: RimPrior, x: Float64Array, weight: (column: number) => boolean): void {
  let sum = 0
  let count = 0
  for (let w = map.weights; w < map.taps; w++) {
    if (!weight(w)) continue
    sum += x[w]! ** 2
    count++
  }
  prior.sd.fill(3 * Math.sqrt(sum / count), map.weights, map.taps)
}

function answerOf(problem: RimProblem, fit: RimFit, rodCount: number): RimAnswer {
  const { map, basis, microphone } = problem
  const columns = Array.from({ length: map.harmonicCount }, (_, h) => map.harmonics + h)
  const covariance = fit.covariance(columns)
  const slopes = Array.from({ length: rodCount }, (_, rod) => columns.map((_c, h) => {
    const angle = (2 + (h >> 1)) * 2 * Math.PI * rod / rodCount
    return h & 1 ? Math.sin(angle) : Math.cos(angle)
  }))
  const offsets = Array.from({ length: LAST.heard }, (_, j) => j).filter(j => basis.families[j]!.m > 0).map(j => fit.x[map.frequencies + j]!).sort((a, b) => a - b)
  return {
    deviation: Float64Array.from(slopes, slope => slope.reduce((sum, s, h) => sum + s * fit.x[columns[h]!]!, 0)),
    standard: Float64Array.from(slopes, slope => Math.sqrt(slope.reduce((sum, s, h) => sum + s * slope.reduce((inner, t, k) => inner + t * covariance[h]![k]!, 0), 0))),
    lnFrequency: offsets[offsets.length >> 1]!,
    microphone, misfit: fit.misfit, rounds: fit.rounds,
  }
}
