import type { MatchingContext } from './matchingContext'
import type { ScoredMode, ScoreInput } from './matchingInput'
import { assignedShare, assignLines } from './matchingAssign'
import { lineEvidence, scoreHypothesis } from './matchingScore'
import { RATIO_SPREAD } from './matchingPriors'
import { MOST_RATIO, modeTables, type ModeTrack } from './matchingTables'

/** A place in the space of tensions worth a closer look. */
export interface Candidate {
  lnTension: number
  /** ln(T_other / T_struck) less the offset of equal wave speeds; 0 for one head. */
  ratio: number
  score: number
}

const SCAN_STEP = { one: 0.005, two: 0.02 }
const SCAN_RATIO_STEP = 0.1
/** Share of what the best hypothesis explains below which one is not scored. */
const HOPELESS = 0.5
/** The loudest line lies at most this far above the head's lowest mode, as a ratio; the lowest loud line at most this far. */
const LOUDEST_ABOVE_LOWEST = 12
const LOW_ABOVE_LOWEST = 4.5
/** The lowest mode may lie above the loudest line, when that is no tone of the head, by this ratio. */
const LOWEST_ABOVE_LOUDEST = 1.9
/** A hypothesis this many nats behind the best cannot catch up when both are fitted. */
const FAR_BEHIND = 28
/** Two candidates nearer than this in ln T are one. */
const SEPARATE = 0.012
const MOST_CANDIDATES = { one: 12, two: 24 }

function read(track: ModeTrack, at: number, into: ScoredMode): boolean {
  const i = Math.min(Math.max(Math.floor(at), 0), track.lnFrequency.length - 2)
  const t = at - i
  const value = track.lnFrequency[i]! * (1 - t) + track.lnFrequency[i + 1]! * t
  if (!(t >= -1e-9 && t <= 1 + 1e-9) || Number.isNaN(value)) return false
  into.lnFrequency = value
  into.damping = track.damping[i]! * (1 - t) + track.damping[i + 1]! * t
  return true
}

/**
 * Scans ln T over the film's whole range (for two heads also the ratio of their tensions) and returns the best separate
 * places, best first.
 */
export function scanHypotheses(context: MatchingContext, input: ScoreInput): Candidate[] {
  const tables = modeTables(context, input.maxHz)
  const step = context.twoHeads ? SCAN_STEP.two : SCAN_STEP.one
  const found: Candidate[] = []
  const pool = new Map<ModeTrack, ScoredMode>()
  const scored = (track: ModeTrack): ScoredMode => {
    let mode = pool.get(track)
    if (!mode) {
      mode = input.describe(track)
      pool.set(track, mode)
    }
    return mode
  }
  let mostExplained = 0
  const open: Candidate[] = []
  const consider = (lnTension: number, ratio: number, modes: ScoredMode[]) => {
    const assignment = assignLines(modes, input)
    const explained = assignedShare(input, assignment)
    mostExplained = Math.max(mostExplained, explained)
    if (explained < HOPELESS * mostExplained) return
    open.push({ lnTension, ratio, score: lineEvidence(modes, input, assignment) - 0.5 * (ratio / RATIO_SPREAD) ** 2 })
  }
  const modesAt = (lnTension: number, ratio: number, base?: ScoredMode[]) => {
    const at = (lnTension - tables.from) / tables.step
    const struck = base ?? tables.struck.map(scored).filter((mode, i) => read(tables.struck[i]!, at, mode))
    if (!context.twoHeads) return struck
    const others = tables.other.map(scored).filter((mode, i) => read(tables.other[i]!, at + ratio / tables.step, mode))
    const r = Math.min(tables.ratios.length - 1, Math.round((ratio - tables.ratios[0]!) / (tables.ratios[1]! - tables.ratios[0]!)))
    return [...struck, ...others, ...betweenRatios(tables.axisymmetric, tables.ratios, ratio, r, at, scored)]
  }
  const lowestFrom = Math.log(Math.max(input.loudestHz / LOUDEST_ABOVE_LOWEST, input.lowestLoudHz / LOW_ABOVE_LOWEST))
  const lowestTo = Math.log(input.loudestHz * LOWEST_ABOVE_LOUDEST)
  for (let lnTension = context.lnTensionFrom; lnTension <= context.lnTensionTo; lnTension += step) {
    const at = (lnTension - tables.from) / tables.step
    const base = tables.struck.map(scored).filter((mode, i) => read(tables.struck[i]!, at, mode))
    const lowest = Math.min(...base.map(mode => mode.lnFrequency))
    if (!(lowest > lowestFrom && lowest < lowestTo)) continue
    if (!context.twoHeads) {
      consider(lnTension, 0, base)
      continue
    }
    for (let ratio = -MOST_RATIO; ratio <= MOST_RATIO + 1e-9; ratio += SCAN_RATIO_STEP) consider(lnTension, ratio, modesAt(lnTension, ratio, base))
  }
  // Levels are the dear part of the score: once even the kindest levels seen would leave the rest this far behind, they are not asked.
  open.sort((a, b) => b.score - a.score)
  let best = -Infinity
  let kindest = -Infinity
  for (const { lnTension, ratio, score } of open) {
    if (score + kindest < best - FAR_BEHIND) break
    const modes = modesAt(lnTension, ratio)
    const full = scoreHypothesis(modes, input) - 0.5 * (ratio / RATIO_SPREAD) ** 2
    best = Math.max(best, full)
    kindest = Math.max(kindest, full - score)
    found.push({ lnTension, ratio, score: full })
  }
  return separate(found.filter(candidate => candidate.score > best - FAR_BEHIND), context.twoHeads ? MOST_CANDIDATES.two : MOST_CANDIDATES.one)
}

/** m = 0 of two heads between two knots of the ratio, straight in ln f. */
function betweenRatios(all: ModeTrack[][], ratios: number[], ratio: number, nearest: number, at: number, scored: (track: ModeTrack) => ScoredMode): ScoredMode[] {
  const low = Math.min(ratio < ratios[nearest]! ? nearest - 1 : nearest, ratios.length - 2)
  const t = (ratio - ratios[low]!) / (ratios[low + 1]! - ratios[low]!)
  const modes: ScoredMode[] = []
  for (const track of all[low]!) {
    const twin = all[low + 1]!.find(other => other.n === track.n && other.other === track.other)
    const mode = scored(track)
    if (!twin || !read(twin, at, mode)) continue
    const upper = mode.lnFrequency
    if (!read(track, at, mode)) continue
    mode.lnFrequency = mode.lnFrequency * (1 - t) + upper * t
    modes.push(mode)
  }
  return modes
}

function separate(found: Candidate[], most: number): Candidate[] {
  found.sort((a, b) => b.score - a.score)
  const kept: Candidate[] = []
  for (const candidate of found) {
    if (kept.length >= most) break
    if (kept.some(k => Math.abs(k.lnTension - candidate.lnTension) < SEPARATE && Math.abs(k.ratio - candidate.ratio) < 0.15)) continue
    kept.push(candidate)
  }
  return kept
}
