import { frequencyLevelDb, placeLevelDb, strikePlaces, type StrikePlace } from './levels'
import type { ExplainRequest } from './explanation'
import type { LineFindings, SpectralLine } from './lines'
import type { MatchingContext } from './matchingContext'
import { modeModelError } from './matchingPriors'
import type { ModeTrack } from './matchingTables'
import type { Strike } from './types'

/** One predicted mode while hypotheses are scored; what follows `placeDb` is set anew for each hypothesis. */
export interface ScoredMode {
  m: number
  n: number
  other: boolean
  /** A resonance of the shell's air: it may be heard, and need not be. */
  air: boolean
  /** The mode that a kettle is played for, (1,1). */
  principal: boolean
  /** Relative standard deviation of the prediction while the air's scale is not fitted. */
  spread: number
  /** Expected level at each strike place, dB, without its dependence on frequency; and the loudest of them. */
  placeDb: Float64Array
  loudestDb: number
  lnFrequency: number
  damping: number
  /** What frequency alone does to the expected level, and the level a line there had to reach to be found, dB. */
  bandDb: number
  floorDb: number
  /** Level of the line taken for this mode, dB; far below any where none was. */
  heardDb: number
  /** Lines taken for this mode so far; ln f and level of the first. */
  used: number
  firstLn: number
  firstDb: number
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
  /** Place in the list of the line that may be its other half on an uneven head, -1 where there is none; and ln of their mean frequency. */
  twin: number
  pairLn: number
  /** How much the line counts in naming: a weaker companion of a louder line is as often its other half as a mode. */
  weight: number
}

export type DescribedTrack = Pick<ModeTrack, 'm' | 'n' | 'other' | 'filmShare' | 'airSensitivity'>

export interface ScoreInput {
  /** Loudest first. */
  lines: ScoredLine[]
  strike: Strike
  places: StrikePlace[]
  maxHz: number
  loudestHz: number
  /** The lowest of the lines within 20 dB of the loudest. */
  lowestLoudHz: number
  /** Sets bandDb and floorDb from lnFrequency. */
  readBand: (mode: ScoredMode) => void
  describe: (track: DescribedTrack) => ScoredMode
}

/** A width that is off by the room, the finger or a neighbour: share of the half-width that frequency may be off by. */
const WIDTH_DOUBT = 0.06
/** A line within this of a louder one, ln f, is its companion: the other half of an uneven pair, a beat, a player's loop. */
const COMPANION = 0.035
const COMPANION_WEIGHT = 0.4
const WIDE = 0.003
/** Both halves of a pair are seldom farther apart in level than this, dB, when both are heard well. */
const ALIKE_DB = 8
const LOUD_WITHIN_DB = 20
const BAND_STEP = 0.01
const HIGHEST_HZ = 3000

/** What scoring a hypothesis needs of a recording's lines and of the drum: gathered once, levels in dB, frequencies in Hz. */
export function scoreInput(context: MatchingContext, findings: LineFindings, request: ExplainRequest): ScoreInput {
  const decaying = findings.lines.filter(line => !line.steady && line.frequencyHz > 0)
  const amplitude = (line: SpectralLine) => 10 ** (line.levelDb / 20)
  const total = decaying.reduce((sum, line) => sum + amplitude(line), 0)
  const places = strikePlaces(request.strike)
  const damped = request.centreDamped && request.strike !== 'centre'
  const lines = decaying.map((line) => {
    const undamped = Math.hypot(line.frequencyHz, line.gammaPerS / (2 * Math.PI))
    const doubt = WIDTH_DOUBT * line.gammaPerS / (2 * Math.PI)
    return { line, lnFrequency: Math.log(undamped), spread: Math.hypot(line.standardErrorHz, doubt) / undamped, levelDb: line.levelDb, share: amplitude(line) / total, weight: 1, twin: -1, pairLn: 0 }
  }).sort((a, b) => b.levelDb - a.levelDb)
  lines.forEach((line, l) => {
    if (lines.some((louder, k) => k < l && Math.abs(louder.lnFrequency - line.lnFrequency) < COMPANION)) line.weight = COMPANION_WEIGHT
  })
  // Where naming is by wide priors, either half of a pair lies within them, and what stands beside a line is more often a loop's trace.
  if (context.priors.othersError < WIDE) findTwins(lines)
  const levels = new Map<string, Float64Array>()
  const levelsOf = (m: number, n: number, other: boolean, filmShare: number) => {
    const name = `${m},${n},${other},${filmShare.toPrecision(2)}`
    const known = levels.get(name)
    if (known) return known
    // Struck and heard through the film: both fall with the root of its share.
    const made = Float64Array.from(places, place => placeLevelDb(m, Math.max(n, 1), place.x, other, damped) + 20 * Math.log10(filmShare))
    levels.set(name, made)
    return made
  }
  return {
    lines, places, strike: request.strike,
    maxHz: Math.min(findings.toHz, HIGHEST_HZ),
    loudestHz: lines[0]?.line.frequencyHz ?? 100,
    lowestLoudHz: Math.min(...lines.filter(line => line.levelDb > (lines[0]?.levelDb ?? 0) - LOUD_WITHIN_DB).map(line => line.line.frequencyHz)),
    readBand: bandReader(findings),
    describe: (track) => {
      const placeDb = levelsOf(track.m, track.n, track.other, track.filmShare)
      const own = track.n === 0 ? context.priors.airResonanceError : modeModelError(context.priors, track.m, track.n, false)
      const air = track.m === 0 ? context.priors.airAxisymmetric : context.priors.airOthers
      return {
        m: track.m, n: track.n, other: track.other, air: track.n === 0, principal: context.construction === 'kettle' && track.m === 1 && track.n === 1, placeDb, loudestDb: Math.max(...placeDb),
        spread: Math.hypot(own, Math.abs(track.airSensitivity) * 0.7 * air, gridSpread(context, track)),
        lnFrequency: 0, damping: 0, bandDb: 0, floorDb: 0, heardDb: -1e3, used: 0, firstLn: 0, firstDb: 0,
      }
    },
  }
}

/** Twins: the loudest two lines that are near enough and like enough in level to be one uneven pair, each line in one pair at most. */
function findTwins(lines: ScoredLine[]): void {
  for (let l = 0; l < lines.length; l++) {
    const line = lines[l]!
    if (line.twin >= 0) continue
    const k = lines.findIndex((other, i) => i > l && other.twin < 0 && other.levelDb > line.levelDb - ALIKE_DB && Math.abs(other.lnFrequency - line.lnFrequency) < COMPANION)
    if (k < 0) continue
    const pairLn = 0.5 * (line.lnFrequency + lines[k]!.lnFrequency)
    Object.assign(line, { twin: k, pairLn })
    Object.assign(lines[k]!, { twin: l, pairLn })
  }
}

/** What the steps of the scan leave open, relative frequency: two heads are scanned in wider steps, of the other head's tension above all. */
function gridSpread(context: MatchingContext, track: Pick<ModeTrack, 'm' | 'other'>): number {
  if (!context.twoHeads) return 0.002
  return track.m === 0 || track.other ? 0.01 : 0.005
}

/** Tables over ln f of what would otherwise be computed for every mode of every hypothesis. */
function bandReader({ detection, fromHz }: LineFindings): (mode: ScoredMode) => void {
  const from = Math.log(20)
  const count = Math.ceil((Math.log(2 * HIGHEST_HZ) - from) / BAND_STEP) + 1
  const band = new Float64Array(count)
  const floor = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    const hz = Math.exp(from + i * BAND_STEP)
    band[i] = frequencyLevelDb(hz)
    floor[i] = detection.levelDb[Math.min(detection.levelDb.length - 1, Math.max(0, Math.round((hz - fromHz) / detection.stepHz)))] ?? -40
  }
  return (mode) => {
    const at = Math.min(count - 1, Math.max(0, Math.round((mode.lnFrequency - from) / BAND_STEP)))
    mode.bandDb = band[at]!
    mode.floorDb = floor[at]!
  }
}
