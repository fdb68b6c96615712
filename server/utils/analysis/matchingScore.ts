import { LEVEL_SPREAD_DB, frequencyLevelDb, placeLevelDb, strikePlaces, type StrikePlace } from './levels'
import type { ExplainRequest } from './explanation'
import type { LineFindings, SpectralLine } from './lines'
import type { MatchingContext } from './matchingContext'
import { modeModelError } from './matchingPriors'
import type { ModeTrack } from './matchingTables'

/** One predicted mode while hypotheses are scored; frequency and damping are set for each. */
export interface ScoredMode {
  m: number
  n: number
  other: boolean
  lnFrequency: number
  damping: number
  /** Relative standard deviation of the prediction while the air's scale is not fitted. */
  spread: number
  /** Expected level at each strike place, dB, without its dependence on frequency. */
  placeDb: Float64Array
}

export interface ScoredLine {
  line: SpectralLine
  /** ln of the undamped frequency. */
  lnFrequency: number
  /** Relative standard error, noise and what the width of the line makes doubtful. */
  spread: number
  levelDb: number
  /** Share of the amplitude of all decaying lines. */
  share: number
}

export interface ScoreInput {
  lines: ScoredLine[]
  places: StrikePlace[]
  maxHz: number
  loudestHz: number
  /** Level in dB that a line had to reach to be found. */
  detectionDb: (frequencyHz: number) => number
  describe: (track: Pick<ModeTrack, 'm' | 'n' | 'other' | 'airSensitivity'>) => ScoredMode
}

/** Lines that belong to nothing: this many per unit of ln f. */
const STRAY_DENSITY = 1.2
/** A loud stray is far less likely than a weak one: nats per dB above the quietest level that counts. */
const LOUD_STRAY_PER_DB = 0.16
const QUIET_DB = -35
/** Nats for all of the amplitude left unexplained. */
const UNEXPLAINED_NATS = 14
/** A width that is off by the room, the finger or a neighbour: share of the half-width that frequency may be off by. */
const WIDTH_DOUBT = 0.06

export function scoreInput(context: MatchingContext, findings: LineFindings, request: ExplainRequest): ScoreInput {
  const decaying = findings.lines.filter(line => !line.steady && line.frequencyHz > 0)
  const amplitude = (line: SpectralLine) => 10 ** (line.levelDb / 20)
  const total = decaying.reduce((sum, line) => sum + amplitude(line), 0)
  const places = strikePlaces(request.strike)
  const damped = request.centreDamped && request.strike !== 'centre'
  const { detection, fromHz } = findings
  const lines = decaying.map((line) => {
    const undamped = Math.hypot(line.frequencyHz, line.gammaPerS / (2 * Math.PI))
    const doubt = WIDTH_DOUBT * line.gammaPerS / (2 * Math.PI)
    return { line, lnFrequency: Math.log(undamped), spread: Math.hypot(line.standardErrorHz, doubt) / undamped, levelDb: line.levelDb, share: amplitude(line) / total }
  }).sort((a, b) => b.levelDb - a.levelDb)
  return {
    lines, places,
    maxHz: findings.toHz,
    loudestHz: lines[0]?.line.frequencyHz ?? 100,
    detectionDb: hz => detection.levelDb[Math.min(detection.levelDb.length - 1, Math.max(0, Math.round((hz - fromHz) / detection.stepHz)))] ?? -40,
    describe: track => ({
      m: track.m, n: track.n, other: track.other, lnFrequency: 0, damping: 0,
      spread: Math.hypot(
        modeModelError(context.priors, track.m, track.n, false),
        Math.abs(track.airSensitivity) * 0.7 * (track.m === 0 ? context.priors.airAxisymmetric : context.priors.airOthers),
        context.twoHeads ? 0.004 : 0.0015,
      ),
      placeDb: Float64Array.from(places, place => placeLevelDb(track.m, track.n, place.x, track.other, damped)),
    }),
  }
}

/** For each line the mode that it is taken for, or -1. A mode with m >= 1 may have two lines. */
export function assignLines(modes: ScoredMode[], input: ScoreInput): Int16Array {
  const assigned = new Int16Array(input.lines.length).fill(-1)
  const used = new Uint8Array(modes.length)
  input.lines.forEach((line, l) => {
    let best = -1
    let cost = Infinity
    for (let k = 0; k < modes.length; k++) {
      const mode = modes[k]!
      if (used[k]! >= (mode.m === 0 ? 1 : 2)) continue
      const spread = Math.hypot(mode.spread, line.spread)
      const z = Math.abs(line.lnFrequency - mode.lnFrequency) / spread
      if (z > 3.2) continue
      const c = 0.5 * z * z + Math.log(spread) + (used[k] ? 2.5 : 0) - 0.115 * Math.max(...mode.placeDb) * 0.3
      if (c < cost) {
        cost = c
        best = k
      }
    }
    if (best < 0) return
    assigned[l] = best
    used[best] = used[best]! + 1
  })
  return assigned
}

/** Probability of exceeding: a logistic that follows the normal distribution to 0.01. */
const normalShare = (z: number) => 1 / (1 + Math.exp(-1.702 * z))

/**
 * Log-likelihood (up to a constant of the recording) of one whole hypothesis, marginal over where the head was struck.
 *
 * Lines are a thinned point process: expected lines at the modes, strays of even density; a mode that should be loud and
 * is missing, a loud stray, and amplitude left unexplained all cost.
 */
export function scoreHypothesis(modes: ScoredMode[], input: ScoreInput, assignment = assignLines(modes, input)): number {
  const { lines, places } = input
  const frequencyDb = modes.map(mode => frequencyLevelDb(Math.exp(mode.lnFrequency)))
  const detectionDb = modes.map(mode => input.detectionDb(Math.exp(mode.lnFrequency)))
  let common = 0
  let unexplained = 0
  const lineOf = new Int16Array(modes.length).fill(-1)
  lines.forEach((line, l) => {
    const k = assignment[l]!
    if (k < 0) {
      unexplained += line.share
      common -= LOUD_STRAY_PER_DB * Math.max(0, line.levelDb - QUIET_DB) * 0.5
      return
    }
    const mode = modes[k]!
    const spread = Math.hypot(mode.spread, line.spread)
    const z = (line.lnFrequency - mode.lnFrequency) / spread
    common += -0.5 * z * z - Math.log(spread * 2.5066 * STRAY_DENSITY) + dampingEvidence(line.line.gammaPerS, mode.damping)
    if (lineOf[k] === -1) lineOf[k] = l
    else common -= 3
  })
  common -= UNEXPLAINED_NATS * unexplained
  let best = -Infinity
  const scores = places.map((place, p) => {
    const score = place.logPrior + levelEvidence(modes, lines, lineOf, frequencyDb, detectionDb, p)
    best = Math.max(best, score)
    return score
  })
  return common + best + Math.log(scores.reduce((sum, score) => sum + Math.exp(score - best), 0))
}

/** Evidence of one strike place: the levels of the lines found, and which modes were and were not heard. */
function levelEvidence(modes: ScoredMode[], lines: ScoredLine[], lineOf: Int16Array, frequencyDb: number[], detectionDb: number[], p: number): number {
  let weight = 0.15
  let offset = 0
  let loudest = -Infinity
  for (let k = 0; k < modes.length; k++) {
    const expected = modes[k]!.placeDb[p]! + frequencyDb[k]!
    loudest = Math.max(loudest, expected)
    if (lineOf[k]! < 0) continue
    weight += 1
    offset += lines[lineOf[k]!]!.levelDb - expected
  }
  offset = (offset - 0.15 * loudest) / weight
  let sum = 0
  for (let k = 0; k < modes.length; k++) {
    const expected = modes[k]!.placeDb[p]! + frequencyDb[k]! + offset
    const heard = Math.max(0.02, 0.97 * normalShare((expected - detectionDb[k]!) / LEVEL_SPREAD_DB))
    if (lineOf[k]! < 0) {
      sum += Math.log(1 - heard)
      continue
    }
    const z = (lines[lineOf[k]!]!.levelDb - expected) / LEVEL_SPREAD_DB
    sum += Math.log(heard) - 0.5 * Math.min(z * z, 6)
  }
  return sum
}

/** A line cannot decay more slowly than its mode radiates; prediction good to some 40 %. */
function dampingEvidence(gammaPerS: number, predictedPerS: number): number {
  if (gammaPerS >= predictedPerS || predictedPerS < 3) return 0
  const z = Math.log(predictedPerS / Math.max(gammaPerS, 0.1)) / 0.4
  return -Math.min(0.5 * z * z, 4)
}
