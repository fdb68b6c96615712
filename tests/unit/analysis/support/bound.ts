import { inverse, Matrix } from 'ml-matrix'
import type { Partial } from './synth'

const PER_TONE = 4

/**
 * Cramer-Rao bounds of the frequencies of a sum of A exp(-gamma t) cos(2 pi f t + phase) in white noise, Hz, in the order
 * of the tones: Fisher information summed sample by sample over all four unknowns of all tones together, so that what a
 * neighbour takes away is in them. Source: Yao & Pandit, IEEE Trans. Signal Process. 43 (1995) 878.
 *
 * Decay and frequency are scaled by the tone's own time first: the matrix of a 3 Hz pair is close to singular as it is.
 */
export function frequencyBoundsHz(tones: Partial[], noise: number, samples: number, rate: number): number[] {
  const size = PER_TONE * tones.length
  const information = new Float64Array(size * size)
  const slopes = new Float64Array(size)
  for (let n = 0; n < samples; n++) {
    const t = n / rate
    tones.forEach((tone, p) => {
      const envelope = tone.amplitude * Math.exp(-tone.gammaPerS * t)
      const angle = 2 * Math.PI * tone.frequencyHz * t + (tone.phaseRad ?? 0)
      const time = t / timeOf(tone, samples / rate)
      slopes[4 * p] = envelope * Math.cos(angle)
      slopes[4 * p + 1] = -envelope * Math.sin(angle)
      slopes[4 * p + 2] = -time * envelope * Math.cos(angle)
      slopes[4 * p + 3] = -time * envelope * Math.sin(angle)
    })
    for (let i = 0; i < size; i++) for (let j = 0; j <= i; j++) information[i * size + j]! += slopes[i]! * slopes[j]!
  }
  const covariance = inverse(Matrix.from1DArray(size, size, Array.from(information, (_, k) => information[Math.max(Math.floor(k / size), k % size) * size + Math.min(Math.floor(k / size), k % size)]!)))
  return tones.map((tone, p) => noise * Math.sqrt(covariance.get(4 * p + 3, 4 * p + 3)) / (2 * Math.PI * timeOf(tone, samples / rate)))
}

const timeOf = (tone: Partial, lengthS: number) => Math.min(lengthS, 1 / Math.max(1e-9, tone.gammaPerS))

/** The bound of one tone alone, Hz; see above. */
export function frequencyBoundHz(tone: Partial, noise: number, samples: number, rate: number): number {
  return frequencyBoundsHz([tone], noise, samples, rate)[0]!
}
