import type { MatchingContext } from './matchingContext'
import type { ScoredMode, ScoreInput } from './matchingInput'
import { scoreHypothesis } from './matchingScore'
import { MOST_RATIO, modeTables, type ModeTrack } from './matchingTables'

/** A place in the space of tensions worth a closer look. */
export interface Candidate {
  lnTension: number
  /** ln(T_other / T_struck) less the offset of equal wave speeds; 0 for one head. */
  ratio: number
  score: number
}

const SCAN_STEP = { one: 0.005, two: 0.016 }
const SCAN_RATIO_STEP = 0.1
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
  const loudest = Math.log(input.loudestHz)
  for (let lnTension = context.lnTensionFrom; lnTension <= context.lnTensionTo; lnTension += step) {
    const at = (lnTension - tables.from) / tables.step
    const base = tables.struck.map(scored).filter((mode, i) => read(tables.struck[i]!, at, mode))
    const lowest = Math.min(...base.map(mode => mode.lnFrequency))
    // The loudest line is one of the first dozen modes of the head, so the lowest mode is not below a sixth of it.
    if (!(lowest > loudest - Math.log(7)) || lowest > loudest + Math.log(1.9)) continue
    if (!context.twoHeads) {
      found.push({ lnTension, ratio: 0, score: scoreHypothesis(base, input) })
      continue
    }
    for (let ratio = -MOST_RATIO; ratio <= MOST_RATIO + 1e-9; ratio += SCAN_RATIO_STEP) {
      const others = tables.other.map(scored).filter((mode, i) => read(tables.other[i]!, at + ratio / tables.step, mode))
      const r = Math.min(tables.ratios.length - 1, Math.round((ratio - tables.ratios[0]!) / (tables.ratios[1]! - tables.ratios[0]!)))
      const axisymmetric = betweenRatios(tables.axisymmetric, tables.ratios, ratio, r, at, scored)
      found.push({ lnTension, ratio, score: scoreHypothesis([...base, ...others, ...axisymmetric], input) })
    }
  }
  return separate(found, context.twoHeads ? MOST_CANDIDATES.two : MOST_CANDIDATES.one)
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
