import type { LowBand } from './decimate'
import { findLines, type LineFindings } from './lines'
import { cutRing, meanPower, type CutRing } from './ring'
import type { Tap } from './taps'

/** One tap heard: its ring, its lines, and how late the listening had to start. */
export interface HeardTap {
  tap: Tap
  ring: CutRing
  /** Amplitudes, levels and phases as they are where listening began: usual start plus delayS. */
  findings: LineFindings
  /** Listening began this long after the usual start, s. */
  delayS: number
}

/**
 * A tap whose decaying lines leave more than this of its energy unexplained is heard again from later on: a hard stroke
 * glides down in pitch, and a hall's first echoes are not the drum. What is left then is the drum at rest.
 */
const WELL_EXPLAINED = 0.85
const DELAYS_S = [0.1, 0.25, 0.5, 1]
const WORTH_WAITING = 0.04
/** Later listening needs this much ring, s, and this power over the noise. */
const NEEDED_S = 0.3
const NEEDED_OVER_NOISE = 30

export function hearTap(band: LowBand, tap: Tap, ring: CutRing): HeardTap {
  let best: HeardTap = { tap, ring, findings: findLines(ring), delayS: 0 }
  for (const delayS of DELAYS_S) {
    if (best.findings.explainedShare >= WELL_EXPLAINED) break
    const later = cutRing(band, { ...tap, lastHitS: tap.lastHitS + delayS })
    const first = Math.min(later.samples.length, Math.round(0.1 * later.sampleRateHz))
    if (later.availableS < NEEDED_S || meanPower(later.samples, 0, first) < NEEDED_OVER_NOISE * later.noisePower) break
    const findings = findLines(later)
    if (findings.explainedShare > best.findings.explainedShare + WORTH_WAITING) best = { tap, ring, findings, delayS }
  }
  return best
}
