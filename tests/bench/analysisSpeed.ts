/**
 * Speed of the analysis of a 3 s, 48 kHz mono recording (a head on the proof fixture) beside the same steps in numpy and scipy (tests/bench/
 * scipyAnalysis.py) on the same machine, both warm, one thread each.
 *
 * npx tsx tests/bench/analysisSpeed.ts     (needs Debian's python3-scipy)
 */
import { execFileSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { benchSteps } from './analysisSteps'
import { benchRecording } from './recording'

interface ScipyRun { ms: Record<string, number>, tensionNPerM: number, lines: number }

const { wav, request, tensionNPerM } = benchRecording('fixture')
const ours = benchSteps(request)
const theirs = scipyRun()
const off = theirs.tensionNPerM / tensionNPerM - 1
// A plain version knows of no finger, no uneven edge and no pairs, and may be a tenth off; more would mean that it did not do the work.
if (Math.abs(off) > 0.12) throw new Error(`The scipy version read ${theirs.tensionNPerM.toFixed(0)} N/m for ${tensionNPerM}: its time says nothing.`)

console.table(Object.fromEntries(Object.keys(ours).map(step => [step, {
  'Rimwright, ms': ours[step]!.ms, 'scipy, ms': theirs.ms[step] ?? null, 'ratio': theirs.ms[step] ? Math.round(100 * ours[step]!.ms / theirs.ms[step]) / 100 : null,
}])))
console.log(`scipy found ${theirs.lines} lines and read ${theirs.tensionNPerM.toFixed(0)} N/m (${(100 * off).toFixed(1)} % off).`)

function scipyRun(): ScipyRun {
  const folder = mkdtempSync(join(tmpdir(), 'rimwright-bench-'))
  try {
    const path = join(folder, 'tap.wav')
    writeFileSync(path, wav)
    const { radiusM, heads: [head] } = request.instrument
    const script = new URL('./scipyAnalysis.py', import.meta.url).pathname
    const answer = execFileSync('python3', [script, path, String(radiusM), String(head!.arealDensityKgM2)], {
      env: { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1' }, encoding: 'utf8', timeout: 120_000, stdio: ['ignore', 'pipe', 'inherit'],
    })
    return JSON.parse(answer) as ScipyRun
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}
