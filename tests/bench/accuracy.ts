/**
 * Accuracy of readings on the simulated drum, printed per construction.
 *
 *   npx tsx tests/bench/accuracy.ts [cases per construction, 40] [--only=open,kettle] [--place=centre] [--seed=1]
 *     [--inputs] [--glide=0.05] [--worst=5] [--cache=DIR]
 *
 * --inputs lets diameter, areal density, modulus and temperature differ from what the analysis is told, each by the
 * standard uncertainty that a workshop's own figures have: only then can a 95 % interval be judged.
 * Doubtful readings count as neither right nor wrong.
 */
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { simulateTap, seededRandom } from '../support/drum'
import type { SimResult, SimTap } from '../support/drum'
import { CONSTRUCTIONS, drawCase } from '../support/drum/cases'
import type { Place, SimCase } from '../support/drum/cases'
import { describeJudged, judge, requestFor } from '../unit/accuracy/readTap'
import type { Judged } from '../unit/accuracy/readTap'

const option = (name: string): string | undefined => process.argv.find(word => word.startsWith(`--${name}=`))?.split('=')[1]
const cases = Math.min(500, Number(process.argv.slice(2).find(word => /^\d+$/.test(word)) ?? 40))
const firstSeed = Number(option('seed') ?? 1)
const only = option('only')?.split(',')
const worst = Number(option('worst') ?? 0)
const cacheDir = option('cache')
const withInputs = process.argv.includes('--inputs')

/** Relative standard deviations of what a maker states: tape on the diameter, data sheet on the film. */
const INPUT_SPREAD = { radius: 0.001, arealDensity: 0.01, modulus: 0.1, temperatureC: 1 }

/** What the maker believes of a drum whose true values are those of the case. */
function nominalOf(tap: SimTap, seed: number): SimTap {
  if (!withInputs) return tap
  const random = seededRandom(seed + 424242)
  const spread = (share: number): number => 1 + share * random.normal()
  const { drum } = tap
  const radius = spread(INPUT_SPREAD.radius)
  const head = (of: typeof drum.batter): typeof drum.batter => ({ ...of, arealDensityKgM2: of.arealDensityKgM2 * spread(INPUT_SPREAD.arealDensity), modulusPa: of.modulusPa * spread(INPUT_SPREAD.modulus) })
  return {
    ...tap,
    drum: { ...drum, radiusM: drum.radiusM * radius, batter: head(drum.batter), resonant: drum.resonant && head(drum.resonant), temperatureC: (drum.temperatureC ?? 20) + INPUT_SPREAD.temperatureC * random.normal() },
  }
}

function sound(tap: SimTap): SimResult {
  if (!cacheDir) return simulateTap(tap)
  mkdirSync(cacheDir, { recursive: true })
  const path = join(cacheDir, createHash('sha1').update(JSON.stringify(tap)).digest('hex'))
  if (existsSync(`${path}.json`)) {
    const bytes = readFileSync(`${path}.f64`)
    const samples = new Float64Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength))
    return { samples, ...(JSON.parse(readFileSync(`${path}.json`, 'utf8')) as Omit<SimResult, 'samples'>) }
  }
  const made = simulateTap(tap)
  writeFileSync(`${path}.f64`, new Uint8Array(made.samples.buffer))
  writeFileSync(`${path}.json`, JSON.stringify({ sampleRateHz: made.sampleRateHz, truth: made.truth }))
  return made
}

const sorted = (values: number[]): number[] => [...values].sort((a, b) => a - b)
const quantile = (values: number[], q: number): number => values.length === 0 ? NaN : sorted(values)[Math.min(values.length - 1, Math.floor(q * values.length))]!
const percent = (value: number, digits = 2): string => `${(100 * value).toFixed(digits)} %`

interface Row { drawn: SimCase, judged: Judged }

function print(name: string, rows: Row[]): void {
  const read = rows.filter(row => row.judged.reading)
  const sure = read.filter(row => !row.judged.reading!.doubtful)
  const errors = sure.map(row => Math.abs(row.judged.tensionError!))
  const wrong = errors.filter(error => error > 0.1).length
  const every = read.map(row => Math.abs(row.judged.tensionError!))
  const pitch = sure.map(row => Math.abs(row.judged.fundamentalError!))
  const inside = sure.filter(row => row.judged.inside95).length
  const width = sure.map(row => row.judged.reading!.tension.u95NPerM / row.judged.truth.tensionNPerM)
  console.log([
    name.padEnd(26), `n ${rows.length}`.padEnd(6),
    `|dT| median ${percent(quantile(errors, 0.5))}  90 % ${percent(quantile(errors, 0.9))}`,
    `wrong ${wrong}`, `(all: ${percent(quantile(every, 0.5))}, ${percent(quantile(every, 0.9))}, ${every.filter(error => error > 0.1).length})`, `doubtful ${percent((read.length - sure.length) / Math.max(1, read.length), 0)}`, `refused ${rows.length - read.length}`,
    `|df01| 90 % ${percent(quantile(pitch, 0.9))}`,
    `inside 95 %: ${percent(inside / Math.max(1, sure.length), 0)} (u95 median ${percent(quantile(width, 0.5))})`,
    `${quantile(rows.map(row => row.judged.ms), 0.5).toFixed(0)} ms`,
  ].join('  '))
}

const all: Row[] = []
for (const construction of CONSTRUCTIONS) {
  if (only && !only.includes(construction)) continue
  const rows: Row[] = []
  for (let i = 0; i < cases; i++) {
    const seed = firstSeed + i
    const drawn = drawCase(construction, seed, { place: option('place') as Place | undefined, glide: Number(option('glide') ?? 0) })
    const made = sound(drawn.tap)
    const request = requestFor(made, drawn.tap, drawn.place, drawn.rodCount, drawn.film, nominalOf(drawn.tap, seed))
    rows.push({ drawn, judged: await judge(request, made.truth) })
  }
  print(construction, rows)
  for (const place of ['centre', 'half-way', 'edge'] as const) {
    const part = rows.filter(row => row.drawn.place === place)
    if (part.length > 0) print(`  ${place}`, part)
  }
  const badness = (row: Row): number => row.judged.reading ? Math.abs(row.judged.tensionError!) : 9
  for (const row of [...rows].sort((a, b) => badness(b) - badness(a)).slice(0, worst)) console.log(`    ${row.drawn.name}: ${describeJudged(row.judged)}`)
  all.push(...rows)
}
print('all', all)

console.log('confidence, stated: share within 10 % of the truth (doubtful ones included)')
for (const [low, high] of [[0, 0.3], [0.3, 0.5], [0.5, 0.7], [0.7, 0.8], [0.8, 0.9], [0.9, 0.95], [0.95, 0.98], [0.98, 1.01]] as const) {
  const part = all.filter(({ judged }) => judged.reading && judged.reading.confidence >= low && judged.reading.confidence < high)
  const mean = part.reduce((sum, { judged }) => sum + judged.reading!.confidence, 0) / part.length
  if (part.length > 0) console.log(`  ${low} to ${Math.min(1, high)} (mean ${percent(mean, 0)}): ${percent(part.filter(({ judged }) => Math.abs(judged.tensionError!) <= 0.1).length / part.length, 0)} of ${part.length}`)
}
