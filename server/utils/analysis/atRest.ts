import { chirpTakenUp, findChirp, groupChirps, type Chirp, type GroupChirp } from './chirp'
import type { FittedTone } from './clusters'
import type { LowBand } from './decimate'
import { explainedShare, isSteady, linesOf, lookAt, type LineFindings, type RingLook } from './lines'
import type { CutRing } from './ring'
import { unbend } from './unbend'

/** A glide counts from this share of the pitch on, and where it stands this many standard errors over nothing. */
const LEAST_SHARE = 0.002
const SURE = 3.5
/** Once one is found, what is left of it, or was taken off too much, is corrected down to this many standard errors. */
const LIKELY = 1.5
const MOST_PASSES = 4
/** No film is stretched so far by a stick, share of the pitch. */
const MOST_SHARE = 0.25
/** Where the first look explains less than this, these glides are tried; one must leave clearly less unexplained. */
const POORLY = 0.93
const CLEARLY_LESS = 0.6
/** A glide that was found must leave this much less, too. */
const LESS = 0.92
const TRIED = [[0.02, 20], [0.05, 20], [0.02, 55], [0.05, 55], [0.1, 20], [0.14, 12]].map(([share, ratePerS]) => ({ share: share!, ratePerS: ratePerS! }))
/** A film that glided this much, share of the pitch, still glides late in its ring. */
const LARGE = 0.04
/** What looks like a glide could be a pair or a hidden line: lines at rest may explain at most this much less than lines as heard. */
const NO_WORSE = 0.002
/** Modes share in the film's stretch alike within this; one far off that is another head's or the air's. */
const OWN_PART = 0.15
const FAR_OFF = 3
/** Least doubt of the rise's shape, share of the glide. */
const DOUBT = 0.1

/** Soft taps glide by this much, usually, share of the pitch. */
const SMALL_GLIDE = 0.004
/** Of a glide heard before, this share may still be there. */
const STILL_THERE = 0.1
/** A larger one is believed by halves from this many standard errors on. */
const HINT = 2

/** Lines this loud, dB, count as parts of a flight. */
const FLIGHT_DB = -20

export interface AtRest {
  findings: LineFindings
  /** How far the pitch stood above its rest where listening began, as a share; 0 where it did not glide. */
  glideShare: number
}

/**
 * Lines with a glide of pitch taken off: the ring is played so that its pitch stands at rest throughout, and searched.
 *
 * The glide is sought after the first look, before further tones follow it down. Modes whose stiffness is not the film's
 * alone (a kettle's or a second head's air) glide less than the rest: what is left in each group of lines is corrected
 * there. Standard errors grow by what is not known of the glide, and of one too small to be sure of.
 * @param earlier  the glide that was heard before this ring begins, share of the pitch: some of it is still there; none given: the ring from its start
 */
export function linesAtRest(band: LowBand, ring: CutRing, earlier?: number): AtRest {
  const first = lookAt(ring)
  const when = earlier === undefined ? 'first' : earlier > LARGE ? 'late' : 'early'
  const { look, rises, left, tried } = straighten(band, ring, first, when)
  const usual = Math.max(SMALL_GLIDE, STILL_THERE * (earlier ?? 0))
  const asHeard = () => ({ findings: halfBelieved(linesOf(first).findings, rises.length === 0 ? left : undefined, usual, stillThere(first, earlier)), glideShare: 0 })
  if (rises.length === 0) return asHeard()
  const rest = linesOf(look)
  const share = rises.reduce((sum, r) => sum + r.share, 0)
  const before = asHeard()
  if (!atRestIsBetter(rest.findings, before.findings, tried)) return before
  const main = rises.reduce((a, b) => (Math.abs(b.share) > Math.abs(a.share) ? b : a))
  const parts = groupChirps(look.grid, rest.tones, main.ratePerS).map(g => ({ ...g, ...ownPart(g, share) }))
  const corrected = { ...rest, findings: withOwnParts(rest.findings, rest.tones, parts) }
  const doubts = [...rises.map(r => ({ ...r, standardError: DOUBT * r.share })), ...left ? [left] : [], ...stillThere(first, earlier)]
  return { findings: doubted(corrected.findings, doubts), glideShare: Math.max(0, share) }
}

/** A glide too small to be sure of: taken off as far as it is likelier than none, and doubted. */
function halfBelieved(findings: LineFindings, left: Chirp | undefined, usual: number, more: Chirp[]): LineFindings {
  if (!left) return doubted(findings, more)
  const likely = left.share > HINT * left.standardError ? left.share / 2 : 0
  const prior = Math.max(usual, likely)
  const weight = prior ** 2 / (prior ** 2 + left.standardError ** 2)
  const share = weight * Math.max(0, left.share)
  const moved = findings.lines.map(line => isSteady(line) ? line : { ...line, frequencyHz: line.frequencyHz * (1 - share * chirpTakenUp(line.gammaPerS, left.ratePerS)) })
  return doubted({ ...findings, lines: moved }, [...more, { ...left, standardError: Math.max(Math.sqrt(weight) * left.standardError, share / 2) }])
}

/** Lines at rest must explain as much; where the glide was guessed, clearly more or as much with fewer lines: one gliding line is a flight of several. */
function atRestIsBetter(rest: LineFindings, before: LineFindings, tried: boolean): boolean {
  const [unexplained, unexplainedBefore] = [1 - rest.explainedShare, 1 - before.explainedShare]
  const loud = ({ lines }: LineFindings) => lines.filter(l => !l.steady && l.levelDb > FLIGHT_DB).length
  if (tried && loud(rest) >= loud(before)) return unexplained < LESS * unexplainedBefore
  return unexplained < unexplainedBefore + NO_WORSE
}

interface Straight { look: RingLook, rises: Chirp[], explained: number }

/** Plays the ring straighter and straighter, as long as that explains more. */
function straighten(band: LowBand, ring: CutRing, first: RingLook, when: 'first' | 'early' | 'late'): { look: RingLook, rises: Chirp[], left: Chirp | undefined, tried: boolean } {
  const played = (rises: Chirp[]): Straight | undefined => {
    if (rises.reduce((sum, r) => sum + r.share, 0) > MOST_SHARE) return undefined
    const look = lookAt({ ...ring, samples: unbend(band.samples, ring.from, ring.samples.length, ring.sampleRateHz, rises) })
    return { look, rises, explained: explainedShare(look.ring, look.tones) }
  }
  let left = findChirp(first, when)
  const unplayed: Straight = { look: first, rises: [], explained: explainedShare(first.ring, first.tones) }
  let best = unplayed
  if (best.explained < POORLY && when === 'first') {
    // Far from rest the first order does not know the way: try.
    for (const { share, ratePerS } of TRIED) {
      const straight = played([{ share, ratePerS, standardError: share / 2 }])
      if (straight && 1 - straight.explained < (best.rises.length ? 1 : CLEARLY_LESS) * (1 - best.explained)) best = straight
    }
    if (best.rises.length) left = findChirp(best.look, when)
  }
  const tried = best.rises.length > 0
  // What did not glide at first does not later.
  if (when === 'early' || (!left && !tried)) return { ...best, left, tried }
  if (!tried && (!left || left.share < LEAST_SHARE || left.share < (when === 'late' ? LIKELY : SURE) * left.standardError)) return { ...best, left, tried }
  for (let pass = 0; pass < MOST_PASSES && left && Math.abs(left.share) > LIKELY * left.standardError; pass++) {
    const enough = best.explained - NO_WORSE / 2
    // A long step is a guess of the first order: half of it where the whole one makes things worse.
    const better: Straight | undefined = [1, 0.5].map(part => part * left!.share)
      .reduce<Straight | undefined>((found, share) => found ?? atLeast(played([...best.rises, { ...left!, share }]), enough), undefined)
    if (!better) break
    best = better
    left = findChirp(best.look, when)
  }
  if (1 - best.explained > LESS * (1 - unplayed.explained)) return { ...unplayed, left: findChirp(first, when), tried }
  return { ...best, left, tried }
}

const atLeast = (straight: Straight | undefined, explained: number) => (straight && straight.explained > explained ? straight : undefined)

/**
 * A group's own part in a glide beyond the common one: what it shows, drawn towards none where that says little. A mode
 * whose stiffness is the air's or another head's glides less or not at all; none glides much more than the film's own.
 */
function ownPart(group: GroupChirp, glide: number): { share: number, standardError: number } {
  const spread = OWN_PART * glide
  const weight = spread ** 2 / (spread ** 2 + group.standardError ** 2)
  const drawn = { share: weight * group.share, standardError: Math.sqrt(weight) * group.standardError }
  if (Math.abs(group.share) < FAR_OFF * Math.hypot(group.standardError, spread)) return drawn
  if (group.share < -spread && group.share > -(1 + OWN_PART) * glide) return group
  return { share: 0, standardError: FAR_OFF * spread }
}

function withOwnParts(findings: LineFindings, tones: FittedTone[], parts: GroupChirp[]): LineFindings {
  const lines = findings.lines.map((line, i) => {
    const part = parts.find(p => p.members.includes(tones[i]!))
    if (!part) return line
    const takenUpHz = line.frequencyHz * chirpTakenUp(line.gammaPerS, part.ratePerS)
    return { ...line, frequencyHz: line.frequencyHz - takenUpHz * part.share, standardErrorHz: Math.hypot(line.standardErrorHz, takenUpHz * part.standardError) }
  })
  return { ...findings, lines }
}

/** What a glide heard before may still hold, as slow as the loudest line itself: real films fall so. */
function stillThere({ tones }: RingLook, earlier = 0): Chirp[] {
  const loudest = tones.filter(t => !isSteady(t)).reduce<FittedTone | undefined>((a, b) => (!a || Math.hypot(b.re, b.im) > Math.hypot(a.re, a.im) ? b : a), undefined)
  return loudest && earlier > 0 ? [{ share: 0, standardError: STILL_THERE * earlier, ratePerS: loudest.gammaPerS }] : []
}

function doubted(findings: LineFindings, doubts: Chirp[]): LineFindings {
  if (doubts.length === 0) return findings
  const lines = findings.lines.map((line) => {
    if (isSteady(line)) return line
    const doubtHz = Math.hypot(...doubts.map(d => line.frequencyHz * d.standardError * chirpTakenUp(line.gammaPerS, d.ratePerS)))
    return { ...line, standardErrorHz: Math.hypot(line.standardErrorHz, doubtHz) }
  })
  return { ...findings, lines }
}
