/**
 * What uploads cost the running app: twenty at once, with the event loop's delay meanwhile, and one recording as large
 * as is taken (120 s, 96 kHz, stereo), with the time it takes and the app's memory at its highest.
 *
 *   NODE_OPTIONS="--import $PWD/tests/bench/eventLoopProbe.mjs" ./docker-free-start.sh
 *   BASE_URL=http://127.0.0.1:3000 DATA_DIR=.data npx tsx tests/bench/uploadLoad.ts
 */
import { readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { setTimeout as pause } from 'node:timers/promises'
import { writeWav16 } from '../support/drum'
import { benchInstrument, benchRecording } from './recording'

const AT_ONCE = 20
const LONG_S = 120
const LONG_RATE_HZ = 96_000

const base = (process.env.BASE_URL ?? 'http://127.0.0.1:3000').replace(/\/$/, '')
const logs = join(process.env.DATA_DIR ?? '.data', 'logs')
const pid = Number(readFileSync(join(logs, 'event-loop.pid'), 'utf8'))

const cookie = await signIn()
const { wav, request } = benchRecording()
const headId = await registerHead()
await upload(wav)

await loopDelay()
const idle = await pause(2000).then(loopDelay)
const start = performance.now()
const times = await Promise.all(Array.from({ length: AT_ONCE }, () => upload(wav)))
const together = performance.now() - start
const busy = await loopDelay()
times.sort((a, b) => a - b)
console.log(`${AT_ONCE} uploads at once: all read within ${Math.round(together)} ms, the middle one ${Math.round(times[AT_ONCE >> 1]!)} ms`)
console.table({ 'event loop delay at rest, ms': idle, [`during ${AT_ONCE} uploads, ms`]: busy })

const long = longRecording()
const before = residentMb()
let most = before
const watch = setInterval(() => most = Math.max(most, residentMb()), 10)
const longMs = await upload(long)
clearInterval(watch)
console.log(`${LONG_S} s, ${LONG_RATE_HZ / 1000} kHz, stereo, ${Math.round(long.byteLength / 2 ** 20)} MB: upload to reading ${Math.round(longMs)} ms; the app's memory ${before} MB before, ${most} MB at its highest`)

/** The bench's tap again and again, with the noise between, until two minutes are full. */
function longRecording(): Uint8Array {
  const samples = new Float64Array(LONG_S * LONG_RATE_HZ)
  const tap = new Int16Array(wav.buffer.slice(wav.byteOffset + 44, wav.byteOffset + wav.byteLength))
  for (let n = 0; n < samples.length; n++) samples[n] = tap[(n >> 1) % tap.length]! / 32_768
  return writeWav16([samples, samples.map(x => 0.6 * x)], LONG_RATE_HZ)
}

function residentMb(): number {
  return Math.round(Number(/VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))![1]) / 1024)
}

async function loopDelay(): Promise<{ p50: number, p99: number, max: number }> {
  const path = join(logs, 'event-loop.json')
  rmSync(path, { force: true })
  process.kill(pid, 'SIGUSR2')
  for (let tries = 0; tries < 200; tries++) {
    await pause(10)
    try {
      return JSON.parse(readFileSync(path, 'utf8')) as { p50: number, p99: number, max: number }
    } catch {
      // Not written yet.
    }
  }
  throw new Error('The app does not answer the probe: was it started with NODE_OPTIONS as above?')
}

async function upload(file: Uint8Array): Promise<number> {
  const form = new FormData()
  form.set('file', new Blob([file as Uint8Array<ArrayBuffer>], { type: 'audio/wav' }), 'tap.wav')
  form.set('strike', 'edge')
  form.set('rod', '1')
  const begun = performance.now()
  await call(`/api/heads/${headId}/recordings`, { method: 'POST', body: form })
  return performance.now() - begun
}

async function registerHead(): Promise<string> {
  const answer = await call('/api/instruments', { method: 'POST', headers: { 'content-type': 'application/json' }, body: JSON.stringify(benchInstrument(request)) }) as { heads: { id: string }[] }
  return answer.heads[0]!.id
}

async function call(path: string, init: RequestInit): Promise<unknown> {
  const answer = await fetch(base + path, { ...init, headers: { cookie, ...init.headers as Record<string, string> }, signal: AbortSignal.timeout(60_000) })
  if (!answer.ok) throw new Error(`${init.method} ${path}: ${answer.status} ${await answer.text()}`)
  return answer.json()
}

async function signIn(): Promise<string> {
  const answer = await fetch(`${base}/api/auth/sign-in`, {
    method: 'POST', headers: { 'content-type': 'application/json' }, signal: AbortSignal.timeout(10_000),
    body: JSON.stringify({ email: 'maker@rimwright.test', password: 'drumhead-demo' }),
  })
  if (!answer.ok) throw new Error(`Sign-in: ${answer.status}. Start the app with its demo data.`)
  return answer.headers.getSetCookie().map(line => line.split(';')[0]).join('; ')
}
