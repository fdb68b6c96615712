import { subtractTone, type DecayingTone } from './decay'
import type { FittedTone, RingSpectrum } from './clusters'

/** Bins count as flank from half a line's half-width to six of them, where the line stands this far over the noise (power). */
const FLANK_FROM = 0.5
const FLANK_TO = 6
const OVER_NOISE = 20
const LOUD_DB = -25
const FEWEST_BINS = 24

/**
 * How much of the lines' own spectrum the room ripples: root of the median of |rest|^2 / |lines|^2 over the lines' flanks.
 *
 * A room answers a line with its own tail at the line's own frequencies: process noise that grows with the line, is mostly
 * swallowed by the fit at the peak, and shows on the flanks. Noise is taken off; 0 where nothing is left.
 * @param noisePerBin  expected |X|^2 of the noise alone
 */
export function roomShare(ring: RingSpectrum, tones: DecayingTone[], noisePerBin: number): number {
  const step = ring.spectrum.stepHz
  const loudest = Math.max(0, ...tones.map(t => Math.hypot(t.re, t.im)))
  const ratios: number[] = []
  for (const tone of tones) {
    if (Math.hypot(tone.re, tone.im) < loudest * 10 ** (LOUD_DB / 20)) continue
    const halfWidthHz = Math.max(0.5, tone.gammaPerS / (2 * Math.PI))
    const reach = FLANK_TO * halfWidthHz
    const from = Math.max(1, Math.floor((tone.frequencyHz - reach) / step))
    const count = Math.min(ring.size / 2 - 1, Math.ceil((tone.frequencyHz + reach) / step)) - from + 1
    if (count < 4) continue
    const values = ring.spectrum.bins.slice(2 * from, 2 * (from + count))
    const rest = { from, count, values: values.slice() }
    const scratch = new Float64Array(2 * count)
    for (const other of tones) subtractTone(ring, other, rest, scratch)
    for (let k = 0; k < count; k++) {
      if (Math.abs((from + k) * step - tone.frequencyHz) < FLANK_FROM * halfWidthHz) continue
      const left = rest.values[2 * k]! ** 2 + rest.values[2 * k + 1]! ** 2
      const lines = (values[2 * k]! - rest.values[2 * k]!) ** 2 + (values[2 * k + 1]! - rest.values[2 * k + 1]!) ** 2
      if (lines > OVER_NOISE * noisePerBin) ratios.push((left - noisePerBin) / lines)
    }
  }
  if (ratios.length < FEWEST_BINS) return 0
  ratios.sort((a, b) => a - b)
  // The median of an exponential distribution is ln 2 of its mean.
  return Math.sqrt(Math.max(0, ratios[ratios.length >> 1]!) / Math.LN2)
}

/** Three times the share, its excursions: what stands lower on a line's flank is the room; never less than 5 %, never more than 40. */
export function rippleOf(share: number): number {
  return Math.max(0.05, Math.min(0.5, 4 * share))
}

/** Widens a tone's standard error by the room's ripple: the share times the line's half-width, times what simulation shows. */
export function withRoom(tone: FittedTone, share: number): FittedTone {
  const roomHz = ROOM_FACTOR * share * tone.gammaPerS / (2 * Math.PI)
  return { ...tone, standardErrorHz: Math.hypot(tone.standardErrorHz, roomHz) }
}

/** From simulated taps in rooms with tails of -30 to -16 dB and 0.3 to 0.6 s: brings the rms of error / standard error to one. */
const ROOM_FACTOR = 1.4
