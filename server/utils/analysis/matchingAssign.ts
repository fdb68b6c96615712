import type { ScoredLine, ScoredMode, ScoreInput } from './matchingInput'

/** A mode is not taken for a line farther off than this many standard deviations. */
const FARTHEST = 3.2
/** Nats that the second line of a pair costs: most pairs are heard as one line. */
export const SECOND_LINE = 2.5
/** Widest pair (1,1), ln: N_2 at 6 % of the mean; higher pairs split less. */
const MOST_SPLIT = 0.032
/** A line weaker than the first of a pair by more than this is more often a room's ripple or a player's loop than its other half, dB. */
const MOST_UNLIKE_DB = 14
/** While only one line of a pair was taken the fit has followed it, and the pair's mean stands off by up to this share of their distance. */
export const PAIR_LEEWAY = 0.5
/** How much a loud mode is preferred to a weak one that lies as near, nats per dB. */
const LOUDER_PER_DB = 0.035

/**
 * Modes by frequency: buckets of BUCKET in ln f, each a chain of modes. The scan asks for a line's neighbours millions of
 * times, so the chains are kept in plain arrays that each assignment fills anew.
 */
const BUCKET = 0.025
const LOWEST_LN = Math.log(10)
const BUCKETS = 300
const firstOf = new Int16Array(BUCKETS)
let nextOf = new Int16Array(256)

const bucketOf = (lnFrequency: number) => Math.min(BUCKETS - 1, Math.max(0, Math.floor((lnFrequency - LOWEST_LN) / BUCKET)))

/** Chains the modes; gives the widest spread among them. */
function chain(modes: ScoredMode[]): number {
  if (nextOf.length < modes.length) nextOf = new Int16Array(2 * modes.length)
  firstOf.fill(-1)
  let widest = 0
  for (let k = 0; k < modes.length; k++) {
    const mode = modes[k]!
    const bucket = bucketOf(mode.lnFrequency)
    mode.used = 0
    nextOf[k] = firstOf[bucket]!
    firstOf[bucket] = k
    if (mode.spread > widest) widest = mode.spread
  }
  return widest
}

/** For each line the mode that it is taken for, or -1. A mode with m >= 1 may have two lines. */
export function assignLines(modes: ScoredMode[], input: ScoreInput): Int16Array {
  const { lines } = input
  const assigned = new Int16Array(lines.length).fill(-1)
  const widest = chain(modes)
  for (let l = 0; l < lines.length; l++) {
    const line = lines[l]!
    const reach = FARTHEST * (widest + line.spread) + 0.5 * MOST_SPLIT
    const last = bucketOf(line.lnFrequency + reach)
    let best = -1
    let cost = Infinity
    for (let bucket = bucketOf(line.lnFrequency - reach); bucket <= last; bucket++) {
      for (let k = firstOf[bucket]!; k >= 0; k = nextOf[k]!) {
        const c = costOf(line, modes[k]!)
        if (c < cost) {
          cost = c
          best = k
        }
      }
    }
    if (best < 0) continue
    assigned[l] = best
    const mode = modes[best]!
    if (mode.used++ > 0) continue
    mode.firstLn = line.lnFrequency
    mode.firstDb = line.levelDb
  }
  return assigned
}

/** What it costs to take a line for a mode, nats; infinite where it is too far or the mode has its lines. */
function costOf(line: ScoredLine, mode: ScoredMode): number {
  if (mode.used > 1 || (mode.used > 0 && (mode.m === 0 || mode.air))) return Infinity
  const variance = mode.spread * mode.spread + line.spread * line.spread
  const off = mode.used ? offAsPair(line, mode) : line.lnFrequency - mode.lnFrequency
  const single = 0.5 * off * off / variance + (mode.used ? SECOND_LINE : 0)
  // A line that stands well off with its like on the other side is half of a pair whose middle is the mode.
  const asPair = mode.used || line.twin < 0 || mode.m === 0 || mode.air || Math.abs(line.lnFrequency - line.pairLn) > 0.5 * MOST_SPLIT / mode.m
    ? Infinity
    : 0.5 * (line.pairLn - mode.lnFrequency) ** 2 / variance + SECOND_LINE
  const cost = Math.min(single, asPair)
  if (cost > 0.5 * FARTHEST * FARTHEST + (mode.used || asPair < single ? SECOND_LINE : 0)) return Infinity
  return cost + 0.5 * Math.log(variance) - LOUDER_PER_DB * mode.loudestDb
}

/** How far the mean of the two lines of a pair lies from its mode, ln; infinite where no head is as uneven as their distance. */
function offAsPair(line: ScoredLine, mode: ScoredMode): number {
  if (Math.abs(line.lnFrequency - mode.firstLn) > MOST_SPLIT / mode.m || line.levelDb < mode.firstDb - MOST_UNLIKE_DB) return Infinity
  return Math.abs(0.5 * (line.lnFrequency + mode.firstLn) - mode.lnFrequency)
}

/** Share of the amplitude of all decaying lines that an assignment explains, 0 to 1. */
export function assignedShare(input: ScoreInput, assignment: Int16Array): number {
  return input.lines.reduce((sum, line, l) => sum + (assignment[l]! < 0 ? 0 : line.share), 0)
}
