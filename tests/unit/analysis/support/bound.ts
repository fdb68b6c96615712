import { inverse, Matrix } from 'ml-matrix'

/**
 * Cramer-Rao bound of the frequency of A exp(-gamma t) cos(2 pi f t + phase) in white noise, Hz: Fisher information summed
 * sample by sample over all four unknowns. Source: Yao & Pandit, IEEE Trans. Signal Process. 43 (1995) 878.
 */
export function frequencyBoundHz(tone: { frequencyHz: number, amplitude: number, gammaPerS: number, phaseRad: number }, noise: number, samples: number, rate: number): number {
  const information = Matrix.zeros(4, 4)
  for (let n = 0; n < samples; n++) {
    const t = n / rate
    const envelope = Math.exp(-tone.gammaPerS * t)
    const angle = 2 * Math.PI * tone.frequencyHz * t + tone.phaseRad
    const wave = envelope * Math.cos(angle)
    const quadrature = -tone.amplitude * envelope * Math.sin(angle)
    const slopes = [wave, -t * tone.amplitude * wave, 2 * Math.PI * t * quadrature, quadrature]
    for (let i = 0; i < 4; i++) for (let j = 0; j < 4; j++) information.set(i, j, information.get(i, j) + slopes[i]! * slopes[j]! / noise ** 2)
  }
  return Math.sqrt(inverse(information).get(2, 2))
}
