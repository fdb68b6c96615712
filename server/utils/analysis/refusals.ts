import type { MonoSound } from './channel'
import type { LowBand } from './decimate'
import type { LineFindings, Ring } from './lines'
import { RefusalError } from './refusal'
import { AFTER_ONSET_S, meanPower } from './ring'
import type { Tap } from './taps'
import type { ReadingWarning } from '../../../shared/types/reading'

const SHORTEST_RECORDING_S = 0.1
/** Below -60 dB of full scale even a 16 bit recording of a tap has only ten bits left. */
const SILENT_PEAK = 1e-3
/** Ring that a reading needs at the least, s: 0.15 s tells lines 7 Hz apart. */
const SHORTEST_RING_S = 0.15
/** Flat tops in more than this share of the first tenth of the ring bend every line's level and add false ones. */
export const CLIPPED_SHARE = 0.005
const CLIP_WINDOW_S = 0.1
/** A tone's own crest can be level for a few samples, but it leaves that level gently: by less than this many steps to the next sample. */
const FLAT_SAMPLES = 3
const GENTLE_STEPS = 5
const FLAT_RUNS = 3

/** Refuses what needs no look at taps: too short to hold one, or nothing recorded. */
export function refuseEmpty(sound: MonoSound) {
  if (sound.samples.length < SHORTEST_RECORDING_S * sound.sampleRateHz) {
    throw new RefusalError('too-short', 'The recording is shorter than a tap. Record a moment of quiet, the tap, and at least a second of its ring.')
  }
  const { low, high, offset } = sound.rails
  if (Math.max(high - offset, offset - low) < SILENT_PEAK) {
    throw new RefusalError('silent', 'The recording is silent. Check that the right microphone is chosen and its gain is up, then tap again.')
  }
}

/** Refuses a recording in which nothing starts suddenly. */
export function refuseNoTap(taps: Tap[]) {
  if (taps.length === 0) {
    throw new RefusalError('no-tap', 'No tap was found: nothing in the recording starts suddenly and dies away. Leave a moment of quiet, tap the head once, and let it ring.')
  }
}

export interface ClippingFound { share: number, runs: number }

/** Share of the first tenth of a second of the ring, and of its contact, that stands level at the recording's own rails. */
export function clippingOf(sound: MonoSound, tap: Tap): ClippingFound {
  const { samples, sampleRateHz, rails } = sound
  // The onset is found in the low band; the stick's click, which clips first, may come a moment before.
  const from = Math.round((tap.atS - 0.005) * sampleRateHz)
  const ringFrom = Math.round((tap.lastHitS + AFTER_ONSET_S) * sampleRateHz)
  const to = Math.min(samples.length, ringFrom + Math.round(CLIP_WINDOW_S * sampleRateHz))
  // Equal to within a 16 bit step: rails of a real converter or of a program are exact.
  const near = 2 ** -15 * Math.max(1, Math.abs(rails.high), Math.abs(rails.low))
  const under = (n: number) => {
    const x = (samples[n] ?? 0) + rails.offset
    return Math.min(rails.high - x, x - rails.low)
  }
  let run = 0
  let runs = 0
  let level = 0
  for (let n = Math.max(0, from); n <= to; n++) {
    if (n < to && under(n) <= near) {
      run++
      continue
    }
    if (run >= FLAT_SAMPLES && (n === to || Math.max(under(n), under(n - run - 1)) > GENTLE_STEPS * near)) {
      runs++
      level += Math.max(0, n - Math.max(n - run, ringFrom))
    }
    run = 0
  }
  return { share: level / Math.max(1, to - ringFrom), runs: runs }
}

/** Refuses a hard-clipped ring; gives a warning where only the contact or a crest or two is clipped. */
export function judgeClipping(found: ClippingFound): ReadingWarning[] {
  if (found.runs < FLAT_RUNS) return []
  if (found.share > CLIPPED_SHARE) {
    throw new RefusalError('clipped', 'The tap is clipped: it was louder than the recording can hold. Turn the microphone\'s gain down or tap more softly, and record again.')
  }
  return [{ code: 'slightly-clipped', message: 'The loudest moment of the tap is clipped. The reading holds, but a lower gain would make it better.' }]
}

/** True where a ring lasts long enough for a reading, s. */
export const longEnough = (ringS: number) => ringS >= SHORTEST_RING_S

/** Refuses where even the longest ring, s, is cut off. */
export function refuseShortRing(longestS: number) {
  if (!longEnough(longestS)) {
    throw new RefusalError('too-short', 'The ring of the tap is cut off. Let the head ring for at least a second before the recording ends or the next tap comes.')
  }
}

/** Share of the ring's energy that decaying lines must explain; speech, claps and cymbals stay below, drums in a hall above. */
const DRUM_SHARE = 0.5
const SLOWEST_RISE_S = 0.015
/** Energy may beat, but no later moment is louder than the first by more than this, and from 0.3 s on all are weaker: a held note is not. */
const LATE_RISE = 1.2
const HELD_FROM_S = 0.3
const HELD_SHARE = 0.8

/** True where a tap starts at once and only falls from there; asked first, since it costs little. */
export function startsLikeTap(band: LowBand, tap: Tap, ring: Ring): boolean {
  return riseTimeS(band, tap) <= SLOWEST_RISE_S && lateOverEarly(ring, 0.08) <= LATE_RISE && lateOverEarly(ring, HELD_FROM_S) <= HELD_SHARE
}

/** True where a ring is a sum of decaying lines. */
export function ringsLikeDrum(findings: LineFindings): boolean {
  return findings.explainedShare >= DRUM_SHARE && findings.lines.some(line => !line.steady)
}

/** Refuses unless more than half of the taps that were looked at are a head's: in speech one or the other may pass. */
export function refuseOtherSounds(likeDrum: number, lookedAt: number) {
  if (likeDrum * 2 <= lookedAt) {
    throw new RefusalError('not-a-drum', 'This does not sound like a tapped head: the sound does not start at once and die away in clear tones. Record only the tap, without speech or music.')
  }
}

/** Time from the onset to half of the loudest 10 ms within the next 150 ms, s. */
export function riseTimeS(band: LowBand, tap: Tap): number {
  const rate = band.sampleRateHz
  const first = Math.round(tap.atS * rate + (band.filterLength - 1) / 2 / band.factor)
  const step = Math.round(0.005 * rate)
  const powers: number[] = []
  for (let i = 0; i < 30 && first + (i + 2) * step <= band.samples.length && (tap.atS + 0.005 * i < tap.endS); i++) {
    powers.push(meanPower(band.samples, first + i * step, first + (i + 2) * step))
  }
  const half = Math.max(...powers) / 2
  return 0.005 * powers.findIndex(p => p >= half)
}

/** Loudest 60 ms from a moment on over the first 60 ms, power ratio. */
export function lateOverEarly(ring: Ring, fromS: number): number {
  const { samples, sampleRateHz: rate } = ring
  const span = Math.round(0.06 * rate)
  const early = meanPower(samples, 0, Math.min(span, samples.length))
  let late = 0
  for (let from = Math.round(fromS * rate); from + span <= samples.length; from += span >> 2) late = Math.max(late, meanPower(samples, from, from + span))
  return early > 0 ? late / early : Infinity
}
