/**
 * Prints the rms frequency error of one line over its Cramer-Rao bound, and over its own stated error, for a grid of
 * noise and decay. Run: npx tsx tests/bench/analysisBound.ts
 */
import { findLines } from '../../server/utils/analysis/lines'
import { frequencyBoundHz } from '../unit/analysis/support/bound'
import { gaussian } from '../unit/analysis/support/synth'

const RATE = 12_000
const SAMPLES = 1.5 * RATE
const RUNS = 40

function errorRatios(snrDb: number, gammaPerS: number) {
  const noise = 10 ** (-snrDb / 20) / Math.SQRT2
  let toBound = 0
  let toStated = 0
  let found = 0
  for (let seed = 1; seed <= RUNS; seed++) {
    const tone = { frequencyHz: 150 + 7.3 * seed, amplitude: 1, gammaPerS, phaseRad: seed }
    const normal = gaussian(1000 * snrDb + seed)
    const samples = Float64Array.from({ length: SAMPLES }, (_, n) => Math.exp(-gammaPerS * n / RATE) * Math.cos(2 * Math.PI * tone.frequencyHz * n / RATE + seed) + noise * normal())
    const line = findLines({ samples, sampleRateHz: RATE, passHz: 4800, noisePower: noise ** 2 }).lines.find(l => Math.abs(l.frequencyHz - tone.frequencyHz) < 4)
    if (!line) continue
    found++
    const error = line.frequencyHz - tone.frequencyHz
    toBound += (error / frequencyBoundHz(tone, noise, SAMPLES, RATE)) ** 2
    toStated += (error / line.standardErrorHz) ** 2
  }
  return { 'found': `${found} of ${RUNS}`, 'error / bound': Math.sqrt(toBound / found).toFixed(2), 'error / stated': Math.sqrt(toStated / found).toFixed(2) }
}

console.table(Object.fromEntries([0, 10, 20, 40].flatMap(snrDb => [3, 10, 30, 90].map(gamma => [`${snrDb} dB, decay ${gamma}/s`, errorRatios(snrDb, gamma)]))))
