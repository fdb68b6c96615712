import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { pathToFileURL } from 'node:url'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { bundleNodeWorker } from '../../../build/node-worker-plugin'
import { AnalysisTimeoutError, createAnalysisPool, type AnalysisPool } from '../../../server/utils/analysis/pool'
import { requestFor } from './support/request'
import { tapSound } from './support/synth'
import { wavFile } from './support/wavFile'

const folder = mkdtempSync(join(tmpdir(), 'rimwright-worker-'))
const workerFile = join(folder, 'analysis.mjs')
const partials = [{ frequencyHz: 246, amplitude: 0.2, gammaPerS: 11 }, { frequencyHz: 339, amplitude: 0.1, gammaPerS: 9 }, { frequencyHz: 428, amplitude: 0.05, gammaPerS: 10 }]
const wav = wavFile([tapSound({ partials, noise: 1e-4, durationS: 2 })])
let pool: AnalysisPool
let inputs: string[]

beforeAll(async () => {
  const bundle = await bundleNodeWorker(resolve('server/workers/analysis.ts'))
  inputs = bundle.inputs
  writeFileSync(workerFile, bundle.source)
  pool = createAnalysisPool(pathToFileURL(workerFile))
})

afterAll(async () => {
  await pool.close()
  rmSync(folder, { recursive: true })
})

describe('the analysis threads', () => {
  it('read a recording and take its bytes without a copy', async () => {
    const bytes = wav.slice()
    const outcome = await pool.analyse(requestFor(bytes))
    expect(outcome.sound).toMatchObject({ durationS: 2, bitDepth: '16 bit' })
    expect(bytes.byteLength).toBe(0)
  })

  it('leave the rest of a shared buffer alone', async () => {
    const shared = new Uint8Array(wav.length + 100)
    shared.set(wav, 50)
    const outcome = await pool.analyse(requestFor(shared.subarray(50, 50 + wav.length)))
    expect(outcome.sound?.durationS).toBe(2)
    expect(shared.byteLength).toBe(wav.length + 100)
  })

  it('answer refusals as outcomes', async () => {
    await expect(pool.analyse(requestFor(new Uint8Array(100)))).resolves.toMatchObject({ kind: 'refused', refusal: { code: 'not-wav' } })
  })

  it('stop at their time limit with an error that says so, and serve the next recording', async () => {
    const impatient = createAnalysisPool(pathToFileURL(workerFile), { timeLimitMs: 1, threads: 1 })
    await expect(impatient.analyse(requestFor(wav.slice()))).rejects.toThrow(AnalysisTimeoutError)
    await impatient.close()
    await expect(pool.analyse(requestFor(wav.slice()))).resolves.toMatchObject({ sound: { durationS: 2 } })
  })

  it('are bundled from the analysis and the acoustics alone', () => {
    const own = inputs.filter(input => !input.includes('node_modules'))
    expect(own.length).toBeGreaterThan(10)
    for (const input of own) expect(input).toMatch(/^(server\/(utils\/analysis|workers)|shared\/acoustics)\//)
  })
})
