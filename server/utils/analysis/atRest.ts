import { chirpTakenUp, findChirp, type Chirp } from './chirp'
import type { LowBand } from './decimate'
import { findLines, type LineFindings } from './lines'
import type { CutRing } from './ring'
import { unbend } from './unbend'

/** A glide counts from this share of the pitch on, and where it stands this many standard errors over nothing. */
const LEAST_SHARE = 0.002
const SURE = 3.5
/** Once one is found, what is left of it, or was taken off too much, is corrected down to this many standard errors. */
const LIKELY = 1.5
const MOST_PASSES = 4
/** Lines at rest explain at most this much less than before, else the glide was none. */
const NO_WORSE = 0.002
/** Least doubt of how much each mode shares in the film's stretch and of the rise's shape, share of the glide. */
const DOUBT = 0.15

export interface AtRest {
  findings: LineFindings
  /** How far the pitch stood above its rest where listening began, as a share; 0 where it did not glide. */
  glideShare: number
}

/**
 * Lines with a glide of pitch taken off: the ring is played so that its pitch stands at rest throughout, and searched again.
 *
 * Rings without a clear glide keep their findings as they are. Standard errors grow by what is not known of the glide.
 */
export function linesAtRest(band: LowBand, ring: CutRing, findings: LineFindings): AtRest {
  const asHeard: AtRest = { findings, glideShare: 0 }
  const rises: Chirp[] = []
  let rest = findings
  let left = findChirp(ring, findings.lines)
  if (!left || left.share < LEAST_SHARE || left.share < SURE * left.standardError) return asHeard
  while (left && rises.length < MOST_PASSES && Math.abs(left.share) > LIKELY * left.standardError) {
    rises.push(left)
    const straight = { ...ring, samples: unbend(band.samples, ring.from, ring.samples.length, ring.sampleRateHz, rises) }
    rest = findLines(straight)
    left = findChirp(straight, rest.lines)
  }
  if (rest.explainedShare < findings.explainedShare - NO_WORSE) return asHeard
  const doubts = [...rises.map(r => ({ ...r, standardError: DOUBT * r.share })), ...left ? [left] : []]
  const lines = rest.lines.map((line) => {
    const doubtHz = Math.hypot(...doubts.map(d => line.frequencyHz * d.standardError * chirpTakenUp(line.gammaPerS, d.ratePerS)))
    return line.steady ? line : { ...line, standardErrorHz: Math.hypot(line.standardErrorHz, doubtHz) }
  })
  return { findings: { ...rest, lines }, glideShare: Math.max(0, rises.reduce((sum, r) => sum + r.share, 0)) }
}
