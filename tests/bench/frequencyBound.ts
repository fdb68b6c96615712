/**
 * Frequency error over the Cramer-Rao bound of the decaying tone (Fisher information of the whole model), on decaying
 * tones in white noise: one, three and nine that stand apart, and pairs down to 3 Hz. Beside it, on the same files, the
 * peak of a Hann-windowed FFT with a parabola through its three highest levels, and scipy's find_peaks.
 *
 *   npx tsx tests/bench/frequencyBound.ts [takes per cell, 20] [--only=1,3,9,pair3,pair5,pair9] [--seed=1]
 *
 * SNR: power of the tone at its start over the noise's, at 12 kHz. Takes of 1.5 s.
 */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { findLines } from '../../server/utils/analysis/lines'
import { hann, powerOf, spectrumOf } from '../../server/utils/analysis/spectrum'
import { drawPair, drawTones, takeOf, RATE, SAMPLES } from '../unit/analysis/support/tones'
import { frequencyBoundsHz } from '../unit/analysis/support/bound'
import type { Partial } from '../unit/analysis/support/synth'

const option = (name: string): string | undefined => process.argv.find(word => word.startsWith(`--${name}=`))?.split('=')[1]
const takes = Math.min(500, Number(process.argv.slice(2).find(word => /^\d+$/.test(word)) ?? 20))
const only = option('only')?.split(',')
const firstSeed = Number(option('seed') ?? 1)

const SNR_DB = [10, 20, 30, 40, 50, 60]
const T60_S = [0.1, 0.3, 1, 2]
const KINDS: Record<string, (seed: number, gammaPerS: number) => Partial[]> = {
  1: (seed, gamma) => drawTones(1, seed, gamma),
  3: (seed, gamma) => drawTones(3, seed, gamma),
  9: (seed, gamma) => drawTones(9, seed, gamma),
  pair9: (seed, gamma) => drawPair(9, seed, gamma),
  pair5: (seed, gamma) => drawPair(5, seed, gamma),
  pair3: (seed, gamma) => drawPair(3, seed, gamma),
}

interface Take { tones: Partial[], bounds: number[], ours: number[], plain: number[], scipy: number[] }
interface Cell { name: string, takes: Take[], path: string }

const window = hann(SAMPLES)

/** Local maxima of the windowed spectrum within 60 dB of its highest, each by the parabola through three levels. */
function plainPeaks(samples: Float64Array): number[] {
  const spectrum = spectrumOf(samples, RATE, window)
  const power = powerOf(spectrum)
  const least = 1e-6 * power.reduce((max, p) => Math.max(max, p), 0)
  const peaks: number[] = []
  for (let k = 2; k < power.length - 1; k++) {
    if (power[k]! < least || power[k]! <= power[k - 1]! || power[k]! < power[k + 1]!) continue
    const [a, b, c] = [k - 1, k, k + 1].map(i => Math.log(power[i]!)) as [number, number, number]
    peaks.push((k + (a - c) / (2 * (a - 2 * b + c))) * spectrum.stepHz)
  }
  return peaks
}

/** Each tone takes the nearest peak not yet taken, the loudest tone first, within `reach`; NaN where there is none. */
function match(tones: Partial[], peaks: number[], reach: (p: number) => number): number[] {
  const free = new Set(peaks)
  const errors = tones.map(() => NaN)
  for (const p of tones.map((_, i) => i).sort((a, b) => tones[b]!.amplitude - tones[a]!.amplitude)) {
    const at = [...free].reduce<number | undefined>((a, b) => (a === undefined || Math.abs(b - tones[p]!.frequencyHz) < Math.abs(a - tones[p]!.frequencyHz) ? b : a), undefined)
    if (at === undefined || Math.abs(at - tones[p]!.frequencyHz) > reach(p)) continue
    free.delete(at)
    errors[p] = at - tones[p]!.frequencyHz
  }
  return errors
}

function makeCell(kind: string, snrDb: number, t60S: number, folder: string): Cell {
  const gamma = Math.log(1000) / t60S
  const file = new Float32Array(takes * SAMPLES)
  const made = Array.from({ length: takes }, (_, i): Take => {
    const seed = firstSeed + i
    const tones = KINDS[kind]!(seed, gamma)
    const { samples, noise } = takeOf(tones, snrDb, seed)
    file.set(samples, i * SAMPLES)
    const found = findLines({ samples, sampleRateHz: RATE, passHz: 4800, noisePower: noise ** 2 })
    return { tones, bounds: frequencyBoundsHz(tones, noise, SAMPLES, RATE), ours: found.lines.map(line => line.frequencyHz), plain: plainPeaks(samples), scipy: [] }
  })
  const path = join(folder, `${kind}-${snrDb}-${t60S}.f32`)
  writeFileSync(path, file)
  return { name: `SNR ${snrDb} dB, T60 ${t60S} s`, takes: made, path }
}

/** Adds scipy's peaks; false where Python or scipy is missing. */
function askScipy(cells: Cell[]): boolean {
  const job = JSON.stringify({ rate: RATE, samples: SAMPLES, files: cells.map(cell => cell.path) })
  const run = spawnSync('python3', [join(import.meta.dirname, 'frequencyPeaks.py')], { input: job, maxBuffer: 1 << 28, encoding: 'utf8' })
  if (run.status !== 0) {
    console.log(`scipy's column is empty: python3 with scipy is needed (apt-get install python3-scipy)${run.stderr ? `: ${run.stderr.trim().split('\n').at(-1)}` : ''}`)
    return false
  }
  const answers = JSON.parse(run.stdout) as number[][][]
  cells.forEach((cell, c) => cell.takes.forEach((take, i) => {
    take.scipy = answers[c]![i]!
  }))
  return true
}

function row(cell: Cell, pairHz: number | undefined, withScipy: boolean) {
  const count = cell.takes.reduce((sum, take) => sum + take.tones.length, 0)
  const summary = (of: 'ours' | 'plain' | 'scipy') => {
    let squares = 0
    let found = 0
    let whole = 0
    for (const take of cell.takes) {
      const errors = match(take.tones, take[of], p => pairHz ? pairHz / 2 : Math.max(3, 6 * take.bounds[p]!))
      errors.forEach((error, p) => {
        if (!Number.isNaN(error)) squares += (error / take.bounds[p]!) ** 2
      })
      found += errors.filter(error => !Number.isNaN(error)).length
      if (errors.every(error => !Number.isNaN(error))) whole++
    }
    const share = pairHz ? `both in ${whole} of ${cell.takes.length}` : `${found} of ${count}`
    return found > 0 ? `${Math.sqrt(squares / found).toPrecision(3)} (${share})` : `- (${share})`
  }
  const bounds = cell.takes.flatMap(take => take.bounds.map(b => b ** 2))
  const bound = Math.sqrt(bounds.reduce((a, b) => a + b, 0) / bounds.length)
  const extra = cell.takes.reduce((sum, take) => sum + Math.max(0, take.ours.length - take.tones.length), 0)
  return {
    'bound, Hz': bound.toPrecision(2),
    ...pairHz && { 'bound / distance': (bound / pairHz).toPrecision(2) },
    'ours': summary('ours'), 'made up': extra, 'FFT peak': summary('plain'), 'find_peaks': withScipy ? summary('scipy') : '-',
  }
}

for (const kind of Object.keys(KINDS)) {
  if (only && !only.includes(kind)) continue
  const folder = mkdtempSync(join(tmpdir(), 'rimwright-bound-'))
  try {
    const cells = SNR_DB.flatMap(snrDb => T60_S.map(t60S => makeCell(kind, snrDb, t60S, folder)))
    const withScipy = askScipy(cells)
    const pairHz = kind.startsWith('pair') ? Number(kind.slice(4)) : undefined
    console.log(pairHz ? `\nTwo tones ${pairHz} Hz apart: rms error / bound (found)` : `\nTones that stand apart, ${kind} a take: rms error / bound (found)`)
    console.table(Object.fromEntries(cells.map(cell => [cell.name, row(cell, pairHz, withScipy)])))
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}
