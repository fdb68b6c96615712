import { analyseRecording } from '../utils/analysis/analyse'

const RATE_HZ = 48_000
const LENGTH_S = 1.6
const TAP_S = 0.3
/** Partials of a 13 in head near 140 Hz: frequency, Hz, and decay rate, 1/s. */
const PARTIALS = [[141, 35], [246, 11], [339, 9], [371, 22], [428, 10], [474, 16]] as const

/**
 * Reads one made-up tap, so that a thread has compiled the analysis and planned its transforms before the first upload:
 * cold, that first reading takes several times as long.
 */
export function warmUp() {
  const samples = new Int16Array(LENGTH_S * RATE_HZ)
  for (let n = 0; n < samples.length; n++) {
    const t = n / RATE_HZ - TAP_S
    let x = 4e-4 * Math.sin(n * n)
    if (t > 0) for (const [frequencyHz, gammaPerS] of PARTIALS) x += 0.12 * Math.exp(-gammaPerS * t) * Math.cos(2 * Math.PI * frequencyHz * t)
    samples[n] = Math.round(32767 * x)
  }
  const radiusM = 0.1651
  analyseRecording({
    wav: wavOf(samples),
    instrument: {
      construction: 'open', radiusM, depthM: 0.2, rodCount: 8,
      heads: [{ side: 'batter', material: 'pet', plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475 }],
    },
    side: 'batter', strike: 'edge', firstRod: 1, centreDamped: false, temperatureC: 20,
  })
}

function wavOf(samples: Int16Array): Uint8Array {
  const bytes = new Uint8Array(44 + samples.byteLength)
  const view = new DataView(bytes.buffer)
  bytes.set(Uint8Array.from('RIFF____WAVEfmt ', c => c.charCodeAt(0)))
  view.setUint32(4, bytes.length - 8, true)
  view.setUint32(16, 16, true)
  view.setUint16(20, 1, true)
  view.setUint16(22, 1, true)
  view.setUint32(24, RATE_HZ, true)
  view.setUint32(28, 2 * RATE_HZ, true)
  view.setUint16(32, 2, true)
  view.setUint16(34, 16, true)
  bytes.set(Uint8Array.from('data', c => c.charCodeAt(0)), 36)
  view.setUint32(40, samples.byteLength, true)
  bytes.set(new Uint8Array(samples.buffer), 44)
  return bytes
}
