/** Takes of decaying tones in white noise, for judging the frequencies found against the Cramer-Rao bound. */
import { gaussian, uniform, type Partial } from './synth'

export const RATE = 12_000
export const SAMPLES = 1.5 * RATE
const LOWEST_HZ = 90
const LEAST_APART_HZ = 40
/** Widths (gamma / pi) between tones that count as standing apart: the bound of each is then that of the tone alone within 3 %. */
const WIDTHS_APART = 4

/** Tones that stand apart, amplitudes within 12 dB, decays within a tenth of gammaPerS, phases free. */
export function drawTones(count: number, seed: number, gammaPerS: number): Partial[] {
  const next = uniform(9001 * seed + count)
  const apart = Math.max(LEAST_APART_HZ, WIDTHS_APART * gammaPerS / Math.PI)
  let at = LOWEST_HZ + apart / 2
  return Array.from({ length: count }, (_, p) => {
    at += apart * (0.2 + next())
    const frequencyHz = at
    at += apart
    return { frequencyHz, amplitude: p === 0 ? 1 : 10 ** (-0.6 * next()), gammaPerS: gammaPerS * (0.9 + 0.2 * next()), phaseRad: 2 * Math.PI * next() }
  })
}

/** Two tones apartHz from each other, the second up to 6 dB weaker. */
export function drawPair(apartHz: number, seed: number, gammaPerS: number): Partial[] {
  const next = uniform(9001 * seed + 77)
  const frequencyHz = 150 + 250 * next()
  return [0, apartHz].map((offset, p) => ({ frequencyHz: frequencyHz + offset, amplitude: p === 0 ? 1 : 10 ** (-0.3 * next()), gammaPerS: gammaPerS * (0.9 + 0.2 * next()), phaseRad: 2 * Math.PI * next() }))
}

/** The tones from their first sample on, in noise snrDb below the loudest's power at its start. */
export function takeOf(tones: Partial[], snrDb: number, seed: number, count = SAMPLES): { samples: Float64Array, noise: number } {
  const noise = Math.max(...tones.map(tone => tone.amplitude)) * 10 ** (-snrDb / 20) / Math.SQRT2
  const normal = gaussian(7919 * seed + Math.round(snrDb))
  const samples = Float64Array.from({ length: count }, () => noise * normal())
  for (const tone of tones) {
    for (let n = 0; n < count; n++) samples[n]! += tone.amplitude * Math.exp(-tone.gammaPerS * n / RATE) * Math.cos(2 * Math.PI * tone.frequencyHz * n / RATE + (tone.phaseRad ?? 0))
  }
  return { samples, noise }
}
