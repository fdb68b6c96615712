import { linesAtRest, type AtRest } from './atRest'
import type { LowBand } from './decimate'
import { glideOf } from './glide'
import type { LineFindings, SpectralLine } from './lines'
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
  /** How far above its rest the pitch stood at the start, as a share; 0 where it did not glide. */
  glideShare: number
}

/**
 * A tap is heard again from later on where its decaying lines leave more than this of its energy unexplained, or where
 * they follow a glide: a hard stroke glides down in pitch, and a hall's first echoes are not the drum. What is left then
 * is the drum at rest.
 */
const WELL_EXPLAINED = 0.93
const DELAYS_S = [0.1, 0.25, 0.5, 1]
/** Later lines must explain this much more; where the earlier ones glide, at most this much less; where they explain too little, any more. */
const WORTH_WAITING = 0.03
const TOO_LITTLE = 0.85
/** A glide's size is known to about this, share of it: where it began and how it fell are both read off the same few lines. */
const GLIDE_DOUBT = 0.2
/** Later listening needs this much ring, s, and this power over the noise. */
const NEEDED_S = 0.3
const NEEDED_OVER_NOISE = 30

/** Finds a tap's lines, from as late on as they need and with what glide is left there taken off; see above. */
export function hearTap(band: LowBand, tap: Tap, ring: CutRing = cutRing(band, tap)): HeardTap {
  const first = heardFrom(tap, ring, linesAtRest(band, ring), 0)
  let best = first
  for (const delayS of DELAYS_S) {
    if (best.findings.explainedShare >= WELL_EXPLAINED && !best.glides) break
    const later = cutRing(band, { ...tap, lastHitS: tap.lastHitS + delayS })
    const opening = meanPower(later.samples, 0, Math.min(later.samples.length, Math.round(0.1 * later.sampleRateHz)))
    if (later.availableS < NEEDED_S || opening < NEEDED_OVER_NOISE * later.noisePower) break
    const heard = heardFrom(tap, ring, linesAtRest(band, { ...later, sinceS: (later.sinceS ?? 0) + delayS }, Math.max(first.glideShare, best.glideShare)), delayS)
    const gained = heard.findings.explainedShare - best.findings.explainedShare
    const needed = best.glides ? -WORTH_WAITING : best.findings.explainedShare < TOO_LITTLE ? 0 : WORTH_WAITING
    if (gained > needed) best = heard
  }
  const share = Math.max(first.glides ? glideShare(first.findings, best.findings) : 0, first.glideShare, best.glideShare)
  const glide = share > 0 ? { share, standardError: GLIDE_DOUBT * share } : undefined
  return { tap, ring, findings: { ...best.findings, glide }, delayS: best.delayS, glideShare: share }
}

function heardFrom(tap: Tap, ring: CutRing, { findings, glideShare }: AtRest, delayS: number): HeardTap & { glides: boolean } {
  return { tap, ring, findings, delayS, glideShare, glides: glideOf(findings).length > 0 }
}

/** Where the flight's loudest step stood over the strongest line near its foot as heard last, as a share. */
function glideShare(early: LineFindings, late: LineFindings): number {
  const flight = glideOf(early)
  const loudest = flight.reduce((a, b) => (b.levelDb > a.levelDb ? b : a))
  const rest = late.lines
    .filter(l => !l.steady && Math.abs(l.frequencyHz / flight[0]!.frequencyHz - 1) < 0.06)
    .reduce<SpectralLine | undefined>((a, b) => (!a || b.levelDb > a.levelDb ? b : a), undefined)
  return rest ? Math.max(0, loudest.frequencyHz / rest.frequencyHz - 1) : 0
}
