import { type SimDrum, simulateTap, writeWav16 } from './drum'

/** A 14 in open tom with one ply of PET, as registered in the bench tests: 3000 N/m. */
export const BENCH_DRUM: SimDrum = {
  construction: 'open',
  radiusM: 0.349_25 / 2,
  depthM: 0.203,
  batter: { tensionNPerM: 3000, plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: 0.3475 },
}

/** A tap of the bench drum, half-way out, as a WAV file. */
export function benchTap({ quietS = 0.4, ringS = 2.2, seed = 3 } = {}): { wav: Buffer, tensionNPerM: number } {
  const { samples, sampleRateHz, truth } = simulateTap({
    drum: BENCH_DRUM,
    strike: { radiusRatio: 0.6, angleRad: 0.7 },
    microphone: { radiusRatio: 0.5, angleRad: 1.9, heightM: 0.12 },
    recording: { seed, sampleRateHz: 24_000, quietS, ringS, snrDb: 45, peakDbfs: -9 },
  })
  return { wav: Buffer.from(writeWav16(samples, sampleRateHz)), tensionNPerM: truth.tensionNPerM }
}

/** Two seconds of next to nothing. */
export function silentWav(): Buffer {
  return Buffer.from(writeWav16(new Float64Array(48_000), 24_000))
}
