/**
 * How well the lines of a tap are found, on the simulated drum: share of true lines found by level, error over the
 * error stated (also by how fast a line dies), lines that are none.
 *
 *   npx tsx tests/bench/accuracyLines.ts [cases per construction, 12] [--only=open,kettle] [--seed=1] [--room] [--verbose]
 *
 * --room puts every tap into a room of -16 to -30 dB and 0.3 to 0.6 s.
 */
import { toLowBand } from '../../server/utils/analysis/decimate'
import { hearTap } from '../../server/utils/analysis/listen'
import { findTaps } from '../../server/utils/analysis/taps'
import { simulateTap } from '../support/drum'
import { CONSTRUCTIONS, drawCase } from '../support/drum/cases'
import { seededRandom } from '../support/drum/random'

const option = (name: string): string | undefined => process.argv.find(word => word.startsWith(`--${name}=`))?.split('=')[1]
const cases = Math.min(200, Number(process.argv.slice(2).find(word => /^\d+$/.test(word)) ?? 12))
const only = option('only')?.split(',')
const firstSeed = Number(option('seed') ?? 1)
const inRooms = process.argv.includes('--room')
const verbose = process.argv.includes('--verbose')

const median = (values: number[]): number => [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? NaN
const rms = (values: number[]): string => values.length ? Math.sqrt(values.reduce((sum, v) => sum + v * v, 0) / values.length).toFixed(2) : '-'
/** Normalised errors of lines that stand apart, by decay. */
const scores: { name: string, to: number, z: number[] }[] = [{ name: 'below 10/s', to: 10, z: [] }, { name: '10 to 20/s', to: 20, z: [] }, { name: '20 to 40/s', to: 40, z: [] }, { name: 'above 40/s', to: Infinity, z: [] }]
const bands = [[-10, 1], [-20, -10], [-30, -20], [-40, -30]] as const

for (const construction of CONSTRUCTIONS) {
  if (only && !only.includes(construction)) continue
  const found = bands.map(() => ({ total: 0, hit: 0 }))
  const ratios: number[] = []
  const relative: number[] = []
  let extra = 0
  let lines = 0
  const times: number[] = []
  for (let i = 0; i < cases; i++) {
    const drawn = drawCase(construction, firstSeed + i)
    const random = seededRandom(31 * (firstSeed + i) + 7)
    if (inRooms) drawn.tap.recording.room = { levelDb: random.uniform(-30, -16), t60S: random.uniform(0.3, 0.6) }
    const sound = simulateTap(drawn.tap)
    const start = performance.now()
    const band = toLowBand(sound.samples, sound.sampleRateHz)
    const tap = findTaps(band)[0]
    if (!tap) {
      console.log(`  ${drawn.name}: no tap found`)
      continue
    }
    const { findings } = hearTap(band, tap)
    times.push(performance.now() - start)
    const heard = findings.lines.filter(line => !line.steady)
    const used = new Set<number>()
    // The loudest first: each takes the nearest line within 1 % (a close pair may be one line).
    for (const mode of [...sound.truth.modes].sort((a, b) => b.levelDb - a.levelDb)) {
      const b = bands.findIndex(([low, high]) => mode.levelDb >= low && mode.levelDb < high)
      if (b < 0) continue
      found[b]!.total++
      let nearest = -1
      heard.forEach((line, j) => {
        if (nearest < 0 || Math.abs(line.frequencyHz - mode.hz) < Math.abs(heard[nearest]!.frequencyHz - mode.hz)) nearest = j
      })
      if (nearest < 0 || Math.abs(heard[nearest]!.frequencyHz / mode.hz - 1) > 0.01) continue
      found[b]!.hit++
      const off = heard[nearest]!.frequencyHz - mode.hz
      // No other mode near enough to be taken for a part of it, unless 25 dB weaker.
      const isolated = mode.levelDb > -20 && sound.truth.modes.every(other => other === mode || other.levelDb < mode.levelDb - 25 || Math.abs(other.hz - mode.hz) > Math.max(2, (other.gammaPerS + mode.gammaPerS) / Math.PI))
      if (isolated && !used.has(nearest)) {
        scores.find(s => mode.gammaPerS < s.to)!.z.push(off / heard[nearest]!.standardErrorHz)
        ratios.push(Math.abs(off) / heard[nearest]!.standardErrorHz)
        relative.push(Math.abs(off) / mode.hz)
      }
      used.add(nearest)
    }
    lines += heard.length
    extra += heard.filter((line, j) => !used.has(j) && line.levelDb > -35).length
    if (verbose) console.log(`  ${drawn.name}\n    true ${sound.truth.modes.filter(mode => mode.levelDb > -35).map(mode => `${mode.hz.toFixed(1)}(${mode.levelDb.toFixed(0)})`).join(' ')}\n    read ${heard.filter(line => line.levelDb > -40).map(line => `${line.frequencyHz.toFixed(1)}±${line.standardErrorHz.toFixed(2)}(${line.levelDb.toFixed(0)})`).join(' ')}`)
  }
  console.log([
    construction.padEnd(14),
    ...bands.map(([low, high], b) => `${Math.min(0, high)} to ${low} dB: ${found[b]!.hit}/${found[b]!.total}`),
    `isolated: |error|/stated median ${median(ratios).toFixed(2)} (0.67 when right), relative median ${(100 * median(relative)).toFixed(3)} %`,
    `not true above -35 dB: ${extra} of ${lines}`, `${median(times).toFixed(0)} ms`,
  ].join('  '))
}
console.log('rms of error / stated error, lines within 20 dB that stand apart, by decay:')
for (const { name, z } of scores) console.log(`  ${name}: ${rms(z)} (${z.length} lines; without the worst twentieth ${rms([...z].sort((a, b) => Math.abs(a) - Math.abs(b)).slice(0, Math.ceil(0.95 * z.length)))})`)
