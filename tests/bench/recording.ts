import type { AnalysisRequest } from '../../server/utils/analysis/types'
import { simulateTap, writeWav16, type SimDrum } from '../support/drum'

const HEAD = { plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: 0.3475 }
const DRUM: SimDrum = {
  construction: 'open', radiusM: 0.1651, depthM: 0.2, batter: { ...HEAD, tensionNPerM: 3000 },
  unevenness: [{ k: 2, ratio: 0.01, phaseRad: 0.4 }, { k: 4, ratio: 0.01, phaseRad: 1.1 }], lossPerS: 2, lossPerHz: 0.02,
}

/** A 3 s, 48 kHz mono recording of one edge tap on a 13 in head, in a room, with noise 40 dB down; tension in N/m. */
export function benchRecording(construction: 'open' | 'fixture' = 'open'): { wav: Uint8Array, request: AnalysisRequest, tensionNPerM: number } {
  const { samples, sampleRateHz } = simulateTap({
    drum: { ...DRUM, construction },
    strike: { radiusRatio: 0.75, angleRad: 0.2, centreDamped: true },
    microphone: { radiusRatio: 0.5, angleRad: 0.2, heightM: 0.1 },
    recording: { seed: 7, sampleRateHz: 48_000, quietS: 0.3, ringS: 2.7, snrDb: 40, room: { levelDb: -22, t60S: 0.4 } },
  })
  const wav = writeWav16(samples, sampleRateHz)
  return {
    wav,
    tensionNPerM: DRUM.batter.tensionNPerM,
    request: {
      wav,
      instrument: { construction, radiusM: DRUM.radiusM, depthM: DRUM.depthM, rodCount: 8, heads: [{ ...HEAD, side: 'batter', material: 'pet', yieldPa: 100e6 }] },
      side: 'batter', strike: 'edge', rod: 1, firstRod: 1, centreDamped: true, temperatureC: 20,
    },
  }
}

/** The same instrument as the API takes it. */
export function benchInstrument({ instrument }: AnalysisRequest) {
  return {
    name: 'Bench: 13 in, open', construction: 'open', diameterMm: 2000 * instrument.radiusM, depthMm: 1000 * instrument.depthM, bowlVolumeL: null,
    rodCount: 8, threadPitchMm: 1.058, customerId: null,
    heads: [{ side: 'batter', film: { material: 'pet', plies: 1, thicknessUm: 250, densityKgM3: 1390, modulusGPa: 4.5, poisson: 0.38, yieldMPa: 100 }, arealDensityKgM2: 0.3475 }],
  }
}
