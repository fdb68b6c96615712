import { LEVEL_SPREAD_DB } from './levels'
import type { ScoredLine, ScoredMode, ScoreInput } from './matchingInput'

/** Lines that belong to nothing: this many per unit of ln f. */
const STRAY_DENSITY = 1.2
/** A loud stray is far less likely than a weak one: nats per dB above the quietest level that counts. */
const LOUD_STRAY_PER_DB = 0.12
const QUIET_DB = -35
/** Nats for all of the amplitude left unexplained. */
const UNEXPLAINED_NATS = 20
/** A mode is not taken for a line farther off than this many standard deviations. */
const FARTHEST = 3.2
/** Nats that the second line of a pair costs: most pairs are heard as one line. */
const SECOND_LINE = 2.5
/** Widest pair (1,1), ln: N_2 at 6 % of the mean; higher pairs split less. */
const MOST_SPLIT = 0.032
/** How much a loud mode is preferred to a weak one that lies as near, nats per dB. */
const LOUDER_PER_DB = 0.035
/** Levels farther off than this many spreads count as this far: something else was at work. */
const MOST_LEVEL_Z2 = 9

/** For each line the mode that it is taken for, or -1. A mode with m >= 1 may have two lines. */
export function assignLines(modes: ScoredMode[], input: ScoreInput): Int16Array {
  const { lines } = input
  const assigned = new Int16Array(lines.length).fill(-1)
  for (const mode of modes) mode.used = 0
  for (let l = 0; l < lines.length; l++) {
    const line = lines[l]!
    let best = -1
    let cost = Infinity
    for (let k = 0; k < modes.length; k++) {
      const mode = modes[k]!
      const off = Math.abs(line.lnFrequency - mode.lnFrequency)
      if (off > 0.15 || mode.used > 1 || (mode.used > 0 && mode.m === 0)) continue
      const spread = Math.sqrt(mode.spread * mode.spread + line.spread * line.spread)
      const z = (mode.used ? offAsPair(line, mode) : off) / spread
      if (z > FARTHEST) continue
      const c = 0.5 * z * z + Math.log(spread) + (mode.used ? SECOND_LINE : 0) - LOUDER_PER_DB * mode.loudestDb
      if (c < cost) {
        cost = c
        best = k
      }
    }
    if (best < 0) continue
    assigned[l] = best
    if (modes[best]!.used++ === 0) modes[best]!.firstLn = line.lnFrequency
  }
  return assigned
}

/** How far the mean of the two lines of a pair lies from its mode, ln; infinite where no head is as uneven as their distance. */
function offAsPair(line: ScoredLine, mode: ScoredMode): number {
  if (Math.abs(line.lnFrequency - mode.firstLn) > MOST_SPLIT / mode.m) return Infinity
  return Math.abs(0.5 * (line.lnFrequency + mode.firstLn) - mode.lnFrequency)
}

/** Chance that a mode is found as a line of its own, by how far its expected level stands above the floor. */
const STEPS_PER_SPREAD = 32
const REACH = 4
const aboveFloor = new Float64Array(2 * REACH * STEPS_PER_SPREAD + 1)
// A logistic follows the normal distribution to 0.01.
for (let i = 0; i < aboveFloor.length; i++) aboveFloor[i] = 1 / (1 + Math.exp(-1.702 * (i / STEPS_PER_SPREAD - REACH)))
/** A weak mode may be missing for many reasons: hidden by a louder neighbour, on a node. A loud one may not. */
const SURE = { loud: 0.985, loudDb: -8, weak: 0.35, weakDb: -32 }
/** A mode expected to be about the loudest, and well above the floor, does not go missing: nats per dB beyond these. */
const MISSED_FROM_DB = -6
const MISSED_ABOVE_FLOOR_DB = 20
const MISSED_PER_DB = 0.4
const MOST_MISSED = 10
const LEAST_CHANCE = 0.02
const LN_LEAST_MISSED = Math.log(1 - LEAST_CHANCE)

function chanceHeard(expectedDb: number, floorDb: number): number {
  const step = Math.round(((expectedDb - floorDb) / LEVEL_SPREAD_DB + REACH) * STEPS_PER_SPREAD)
  const share = Math.min(1, Math.max(0, (expectedDb - SURE.weakDb) / (SURE.loudDb - SURE.weakDb)))
  const sure = SURE.weak + (SURE.loud - SURE.weak) * share
  return Math.max(LEAST_CHANCE, sure * aboveFloor[step < 0 ? 0 : step >= aboveFloor.length ? aboveFloor.length - 1 : step]!)
}

/** Share of the amplitude of all decaying lines that an assignment explains, 0 to 1. */
export function explainedShare(input: ScoreInput, assignment: Int16Array): number {
  return input.lines.reduce((sum, line, l) => sum + (assignment[l]! < 0 ? 0 : line.share), 0)
}

/**
 * Log-likelihood (up to a constant of the recording) of one whole hypothesis, marginal over where the head was struck.
 *
 * Lines are a thinned point process: expected lines at the modes, strays of even density; a mode that should be loud and
 * is missing, a loud stray, and amplitude left unexplained all cost.
 */
export function scoreHypothesis(modes: ScoredMode[], input: ScoreInput, assignment = assignLines(modes, input)): number {
  const { lines, places } = input
  let common = 0
  let unexplained = 0
  for (const mode of modes) {
    mode.heardDb = NaN
    input.readBand(mode)
  }
  for (let l = 0; l < lines.length; l++) {
    const line = lines[l]!
    const k = assignment[l]!
    if (k < 0) {
      unexplained += line.weight * line.share
      common -= line.weight * LOUD_STRAY_PER_DB * Math.max(0, line.levelDb - QUIET_DB)
      continue
    }
    const mode = modes[k]!
    // Lines come loudest first: the second line of a pair says nothing more about the level.
    if (Number.isNaN(mode.heardDb)) {
      common += line.weight * frequencyEvidence(line, mode)
      mode.heardDb = line.levelDb
    } else {
      common -= line.weight * SECOND_LINE
    }
  }
  common -= UNEXPLAINED_NATS * unexplained
  let best = -Infinity
  let sum = 0
  for (let p = 0; p < places.length; p++) {
    const score = places[p]!.logPrior + levelEvidence(modes, p)
    if (score > best) {
      sum = sum * Math.exp(best - score) + 1
      best = score
    } else {
      sum += Math.exp(score - best)
    }
  }
  return common + best + Math.log(sum)
}

function frequencyEvidence(line: ScoredLine, mode: ScoredMode): number {
  const spread = Math.sqrt(mode.spread * mode.spread + line.spread * line.spread)
  const z = (line.lnFrequency - mode.lnFrequency) / spread
  return -0.5 * z * z - Math.log(spread * 2.5066 * STRAY_DENSITY) + dampingEvidence(line.line.gammaPerS, mode.damping)
}

/** Evidence of one strike place: the levels of the lines found, and which modes were and were not heard. */
function levelEvidence(modes: ScoredMode[], p: number): number {
  let weight = 0.15
  let offset = 0
  let loudest = -Infinity
  for (const mode of modes) {
    const expected = mode.placeDb[p]! + mode.bandDb
    loudest = Math.max(loudest, expected)
    if (Number.isNaN(mode.heardDb)) continue
    weight += 1
    offset += mode.heardDb - expected
  }
  // With few lines the loudest expected mode is taken to be the loudest line.
  offset = (offset - 0.15 * loudest) / weight
  let sum = 0
  for (const mode of modes) {
    const expected = mode.placeDb[p]! + mode.bandDb + offset
    const heard = chanceHeard(expected, mode.floorDb)
    if (Number.isNaN(mode.heardDb)) {
      sum += heard === LEAST_CHANCE ? LN_LEAST_MISSED : Math.log(1 - heard)
      const over = Math.min(expected, expected - mode.floorDb - MISSED_ABOVE_FLOOR_DB) - MISSED_FROM_DB
      if (over > 0) sum -= Math.min(MOST_MISSED, MISSED_PER_DB * over)
      continue
    }
    const z = (mode.heardDb - expected) / LEVEL_SPREAD_DB
    sum += Math.log(heard) - 0.5 * Math.min(z * z, MOST_LEVEL_Z2)
  }
  return sum
}

/** A line cannot decay more slowly than its mode radiates; prediction good to some 40 %. */
function dampingEvidence(gammaPerS: number, predictedPerS: number): number {
  if (gammaPerS >= predictedPerS || predictedPerS < 3) return 0
  const z = Math.log(predictedPerS / Math.max(gammaPerS, 0.1)) / 0.4
  return -Math.min(0.5 * z * z, 4)
}
