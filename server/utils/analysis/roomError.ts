import { subtractTone, type DecayingTone } from './decay'
import type { FittedTone, RingSpectrum } from './clusters'

/**
 * A room answers a drum with a tail of its own: to each line L(f) it adds L(f) H(f), H random over frequencies some
 * ROOM_GAMMA / pi apart, mean square `share`^2. That is process noise which grows with the line: no white noise describes
 * it, the fit swallows part of it, and a louder tap does not help.
 */

/** Amplitude decay of a room's tail, 1/s: T60 of 0.3 to 0.6 s are 23 to 12; what is stated hardly depends on it. */
const ROOM_GAMMA_PER_S = 16
/** The tail's first moments, s, are the direct sound. */
const TAIL_STARTS_S = 0.003
const MOST_GROWTH = 8
/** What the first order leaves out: lines that are never quite apart, the share's own error; from simulated taps in rooms. */
const AS_SIMULATED = 1.3
/** Square of a line's error over its half-width, per unit of what is left around it: 2.5 to 3.5 for gamma up to 2 gamma_r, simulated. */
const LEFT_TO_ERROR = 3
/** The pooled share counts like this many degrees of freedom beside what is left around the line itself. */
const POOLED_FREEDOM = 3
/** What is thought of a room before it is heard: its tail's energy over the direct sound's, and how far that may be off. */
const PRIOR = 0.003
const PRIOR_SPREAD = 0.005
/** A line's bins count to this many half-widths. */
const REACH = 6
const LOUD_DB = -25

/**
 * The room's tail over the direct sound, root of the ratio of energies, from what the fitted lines leave around themselves.
 *
 * A line of decay gamma leaves the share x / (5 + x) of what the room adds within six half-widths, x = gamma / ROOM_GAMMA,
 * in about 2 + 2.5 x degrees of freedom (simulated; the fit swallows the rest). Noise is taken off; lines count by what
 * they can tell, and where they tell nothing the prior stands.
 * @param noisePerBin  expected |X|^2 of the noise alone
 * @param sinceS       how long after the contact the ring begins, s
 */
export function roomShare(ring: RingSpectrum, tones: DecayingTone[], noisePerBin: number, sinceS: number): number {
  const loudest = Math.max(0, ...tones.map(t => Math.hypot(t.re, t.im)))
  const heard = tones.filter(t => t.gammaPerS > 0.5 && Math.hypot(t.re, t.im) >= loudest * 10 ** (LOUD_DB / 20))
    .map(t => ({ ...leftAround(ring, t, tones, noisePerBin, sinceS), freedom: 2 + 2.5 * t.gammaPerS / ROOM_GAMMA_PER_S }))
  let share = PRIOR
  for (let i = 0; i < 8; i++) {
    let weights = PRIOR_SPREAD ** -2
    let sum = PRIOR * weights
    for (const { ratio, error, freedom } of heard) {
      const weight = 1 / (error ** 2 + 2 / freedom * share ** 2)
      weights += weight
      // One line that is not what it seems must not speak for the room.
      sum += weight * Math.min(ratio, LARGEST)
    }
    share = Math.max(sum / weights, 0.15 / Math.sqrt(weights))
  }
  return Math.sqrt(share)
}

/** A tail louder than -10 dB makes a recording that is refused or heard late. */
const LARGEST = 0.1

/** The tail's energy over the line's as its surroundings have it, noise taken off, and the standard error by noise; `left` as it stands. */
function leftAround(ring: RingSpectrum, tone: DecayingTone, all: DecayingTone[], noisePerBin: number, sinceS: number): { ratio: number, error: number, left: number } {
  const step = ring.spectrum.stepHz
  const reach = REACH * Math.max(0.5, tone.gammaPerS / (2 * Math.PI))
  const from = Math.max(1, Math.floor((tone.frequencyHz - reach) / step))
  const count = Math.max(4, Math.min(ring.size / 2 - 1, Math.ceil((tone.frequencyHz + reach) / step)) - from + 1)
  const values = ring.spectrum.bins.subarray(2 * from, 2 * (from + count))
  const rest = { from, count, values: values.slice() }
  const scratch = new Float64Array(2 * count)
  for (const other of all) subtractTone(ring, other, rest, scratch)
  let left = -count * noisePerBin
  let lines = 0
  for (let k = 0; k < 2 * count; k++) {
    left += rest.values[k]! ** 2
    lines += (values[k]! - rest.values[k]!) ** 2
  }
  const x = tone.gammaPerS / ROOM_GAMMA_PER_S
  const kept = lines * x / (5 + x) * growth(tone.gammaPerS, sinceS) ** 2
  return { ratio: left / kept, error: noisePerBin * Math.sqrt(count * ring.size / ring.length) / kept, left: Math.max(0, left / lines) }
}

/** A line that dies faster than the room has lost that much to it by the time the ring begins. */
function growth(gammaPerS: number, sinceS: number): number {
  return Math.min(MOST_GROWTH, Math.exp((gammaPerS - ROOM_GAMMA_PER_S) * Math.max(0, sinceS - TAIL_STARTS_S)))
}

/** Four times the share, its excursions: what stands lower on a line's flank is the room; never less than 5 %, never more than 50. */
export function rippleOf(share: number): number {
  return Math.max(0.05, Math.min(0.5, 4 * share))
}

/**
 * Widens a tone's standard error by the room.
 *
 * Its own tail: to first order delta s = (2 gamma)^2 integral rho(tau) tau exp(-gamma tau) d tau for a tail rho of decay
 * gamma_r, so sigma_f = gamma / (2 pi) share 2 x / (1 + x)^1.5, x = gamma / gamma_r; more where neighbours leave the tone
 * less to stand on. The tails of the others stand at its place like noise.
 */
export function withRoom(ring: RingSpectrum, tone: FittedTone, all: FittedTone[], room: { share: number, noisePerBin: number, sinceS: number }): FittedTone {
  const { share, noisePerBin, sinceS } = room
  const x = tone.gammaPerS / ROOM_GAMMA_PER_S
  const alone = (2 * tone.gammaPerS) ** 1.5 / (2 * Math.PI * Math.hypot(tone.re, tone.im) * Math.sqrt(ring.size * ring.sampleRateHz))
  const crowded = Math.max(1, Math.min(MOST_GROWTH, tone.errorPerUnitHz / alone))
  const pooled = share * growth(tone.gammaPerS, sinceS) * 2 * x / (1 + x) ** 1.5
  const freedom = 2 + 2.5 * x
  const { left } = leftAround(ring, tone, all, noisePerBin, sinceS)
  const own = AS_SIMULATED * tone.gammaPerS / (2 * Math.PI) * crowded * Math.sqrt((POOLED_FREEDOM * pooled ** 2 + freedom * LEFT_TO_ERROR * left) / (POOLED_FREEDOM + freedom))
  const others = Math.min(1e3, tone.errorPerUnitHz) * share * otherLines(ring, tone, all, sinceS) * Math.sqrt(ring.size / ring.length / 2)
  return { ...tone, standardErrorHz: Math.hypot(Math.max(tone.standardErrorHz, others), own) }
}

/** Root of the sum of the other lines' |X|^2 at a tone's place, each by how loud the room answers it. */
function otherLines(ring: RingSpectrum, tone: FittedTone, all: FittedTone[], sinceS: number): number {
  return Math.sqrt(all.reduce((sum, other) => {
    if (other === tone) return sum
    const height = Math.hypot(other.re, other.im) * ring.sampleRateHz / Math.hypot(other.gammaPerS, 2 * Math.PI * (other.frequencyHz - tone.frequencyHz))
    return sum + (height * growth(other.gammaPerS, sinceS)) ** 2
  }, 0))
}
