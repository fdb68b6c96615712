import type { AnalysisRequest } from '../../../../server/utils/analysis/types'

/** A 13 in head on an open shell, tapped near the edge; the sound is the test's. */
export function requestFor(wav: Uint8Array, changes: Partial<AnalysisRequest> = {}): AnalysisRequest {
  return {
    wav,
    instrument: {
      construction: 'open', radiusM: 0.1651, depthM: 0.2, rodCount: 8,
      heads: [{ side: 'batter', material: 'pet', plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475 }],
    },
    side: 'batter',
    strike: 'edge',
    firstRod: 1,
    centreDamped: false,
    temperatureC: 20,
    ...changes,
  }
}
