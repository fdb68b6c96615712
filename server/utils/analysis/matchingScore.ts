import { LEVEL_SPREAD_DB } from './levels'
import { assignLines, SECOND_LINE } from './matchingAssign'
import type { ScoredMode, ScoreInput, ScoredLine } from './matchingInput'
import type { Strike } from './types'

/** Lines that belong to nothing: this many per unit of ln f. */
const STRAY_DENSITY = 1.2
/** A loud stray is far less likely than a weak one: nats per dB above the quietest level that counts. */
const LOUD_STRAY_PER_DB = 0.12
const QUIET_DB = -35
/** Nats for all of the amplitude left unexplained. */
const UNEXPLAINED_NATS = 20
/** Nats that it costs to leave the tone out that a strike is sure to sound: only a microphone on its node would not hear it. */
const PRINCIPAL_MISSED = 8
/** Levels farther off than this many spreads count as this far: something else was at work. */
const MOST_LEVEL_Z2 = 9

/** A weak mode may be missing for many reasons: hidden by a louder neighbour, on a node. A loud one may not. */
const SURE = { loud: 0.985, loudDb: -8, weak: 0.35, weakDb: -32 }
/** A mode expected to be about the loudest, and well above the floor, does not go missing: nats per dB beyond these. */
const MISSED_FROM_DB = -6
const MISSED_ABOVE_FLOOR_DB = 20
const MISSED_PER_DB = 0.4
const MOST_MISSED = 10
const LEAST_CHANCE = 0.02

/** Table of the chance that a mode is heard: by its level above the floor, in spreads, and by its level in steps of half a dB. */
const STEPS_PER_SPREAD = 32
const REACH = 4
const STEPS_PER_DB = STEPS_PER_SPREAD / LEVEL_SPREAD_DB
const SPREADS_PER_DB = 1 / LEVEL_SPREAD_DB
const STEPS = 2 * REACH * STEPS_PER_SPREAD + 1
const LEVELS = 2 * (SURE.loudDb - SURE.weakDb) + 1
const lnHeard = new Float64Array(STEPS * LEVELS)
const lnMissed = new Float64Array(STEPS * LEVELS)
for (let level = 0; level < LEVELS; level++) {
  const sure = SURE.weak + (SURE.loud - SURE.weak) * level / (LEVELS - 1)
  for (let step = 0; step < STEPS; step++) {
    // A logistic follows the normal distribution to 0.01.
    const above = 1 / (1 + Math.exp(-1.702 * (step / STEPS_PER_SPREAD - REACH)))
    const chance = Math.max(LEAST_CHANCE, sure * above)
    lnHeard[level * STEPS + step] = Math.log(chance)
    lnMissed[level * STEPS + step] = Math.log(1 - chance)
  }
}

/** Place in the table of a mode expected at a level, dB, over a floor, dB. */
function chanceAt(expectedDb: number, floorDb: number): number {
  const step = Math.round((expectedDb - floorDb) * STEPS_PER_DB + REACH * STEPS_PER_SPREAD)
  const level = Math.round(2 * (expectedDb - SURE.weakDb))
  return (level < 0 ? 0 : level >= LEVELS ? LEVELS - 1 : level) * STEPS + (step < 0 ? 0 : step >= STEPS ? STEPS - 1 : step)
}

/** Level of a mode that was not heard. */
const SILENT = -1e3

/**
 * Log-likelihood (up to a constant of the recording) of one whole hypothesis, marginal over where the head was struck.
 *
 * Lines are a thinned point process: expected lines at the modes, strays of even density; a mode that should be loud and
 * is missing, a loud stray, and amplitude left unexplained all cost.
 */
export function scoreHypothesis(modes: ScoredMode[], input: ScoreInput, assignment = assignLines(modes, input)): number {
  const common = lineEvidence(modes, input, assignment)
  for (const mode of modes) input.readBand(mode)
  return common + levelsEvidence(modes, input)
}

/** The part of the score that needs no levels of modes: no hypothesis scores higher. Leaves each mode's heardDb set. */
export function lineEvidence(modes: ScoredMode[], input: ScoreInput, assignment: Int16Array): number {
  const { lines } = input
  let common = 0
  let unexplained = 0
  for (const mode of modes) mode.heardDb = SILENT
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
    if (mode.heardDb === SILENT) {
      const lnFrequency = line.twin >= 0 && assignment[line.twin] === k ? line.pairLn : line.lnFrequency
      common += line.weight * frequencyEvidence(line, lnFrequency, mode)
      mode.heardDb = line.levelDb
    } else {
      common -= line.weight * SECOND_LINE
    }
  }
  if (principalMissing(modes, input.strike)) common -= PRINCIPAL_MISSED
  return common - UNEXPLAINED_NATS * unexplained
}

/** The modes' levels side by side, for the scan asks millions of times: band, floor, heard, expected at the place at hand, and which need not be heard. */
let sideBySide = Array.from({ length: 5 }, () => new Float64Array(256))

/** A kettle is played for (1,1), and a tap at the centre sounds the lowest mode without nodal diameters: true where that was not heard. */
function principalMissing(modes: ScoredMode[], strike: Strike): boolean {
  let lowest: ScoredMode | undefined
  for (const mode of modes) {
    if (mode.principal && mode.heardDb === SILENT) return true
    if (mode.m === 0 && !mode.air && (!lowest || mode.lnFrequency < lowest.lnFrequency)) lowest = mode
  }
  return strike === 'centre' && lowest !== undefined && lowest.heardDb === SILENT
}

/** What the levels add, never more than 0: marginal over the place of the strike. */
function levelsEvidence(modes: ScoredMode[], { places }: ScoreInput): number {
  if (sideBySide[0]!.length < modes.length) sideBySide = Array.from({ length: 5 }, () => new Float64Array(2 * modes.length))
  const [band, floor, heard, , optional] = sideBySide as [Float64Array, Float64Array, Float64Array, Float64Array, Float64Array]
  for (let k = 0; k < modes.length; k++) {
    const mode = modes[k]!
    band[k] = mode.bandDb
    floor[k] = mode.floorDb
    heard[k] = mode.heardDb
    optional[k] = mode.air ? 1 : 0
  }
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
  return best + Math.log(sum)
}

function frequencyEvidence(line: ScoredLine, lnFrequency: number, mode: ScoredMode): number {
  const spread = Math.sqrt(mode.spread * mode.spread + line.spread * line.spread)
  const z = (lnFrequency - mode.lnFrequency) / spread
  return -0.5 * z * z - Math.log(spread * 2.5066 * STRAY_DENSITY) + dampingEvidence(line.line.gammaPerS, mode.damping)
}

/** Evidence of one strike place: the levels of the lines found, and which modes were and were not heard. */
function levelEvidence(modes: ScoredMode[], p: number): number {
  const [band, floor, heard, expected, optional] = sideBySide as [Float64Array, Float64Array, Float64Array, Float64Array, Float64Array]
  const count = modes.length
  let weight = 0.15
  let offset = 0
  let loudest = -Infinity
  for (let k = 0; k < count; k++) {
    const level = modes[k]!.placeDb[p]! + band[k]!
    expected[k] = level
    if (level > loudest && optional[k] === 0) loudest = level
    const h = heard[k]!
    if (!(h > SILENT)) continue
    weight += 1
    offset += h - level
  }
  // With few lines the loudest expected mode is taken to be the loudest line.
  offset = (offset - 0.15 * loudest) / weight
  let sum = 0
  for (let k = 0; k < count; k++) {
    const level = expected[k]! + offset
    const at = chanceAt(level, floor[k]!)
    const h = heard[k]!
    if (h > SILENT) {
      const z = (h - level) * SPREADS_PER_DB
      sum += lnHeard[at]! - 0.5 * Math.min(z * z, MOST_LEVEL_Z2)
      continue
    }
    if (optional[k] === 1) continue
    sum += lnMissed[at]!
    const over = Math.min(level, level - floor[k]! - MISSED_ABOVE_FLOOR_DB) - MISSED_FROM_DB
    if (over > 0) sum -= Math.min(MOST_MISSED, MISSED_PER_DB * over)
  }
  return sum
}

/** A line cannot decay more slowly than its mode radiates; prediction good to some 40 %. */
function dampingEvidence(gammaPerS: number, predictedPerS: number): number {
  if (gammaPerS >= predictedPerS || predictedPerS < 3) return 0
  const z = Math.log(predictedPerS / Math.max(gammaPerS, 0.1)) / 0.4
  return -Math.min(0.5 * z * z, 4)
}
