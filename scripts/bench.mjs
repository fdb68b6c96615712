// Prints how long the bench's own waits are: upload to reading, each step of the analysis, first page of the history.
// Speed depends on the machine, so nothing is asserted. Needs a running app: BASE_URL=http://127.0.0.1:3000 npm run bench
import { register } from 'tsx/esm/api'

register()
const { benchRecording, benchInstrument } = await import('../tests/bench/recording.ts')
const { benchSteps } = await import('../tests/bench/analysisSteps.ts')

const UPLOADS = 50
const PAGES = 20

const { wav, request } = benchRecording()
console.log('Analysis of a 3 s, 48 kHz mono WAV in this process, warm, median of 20:')
console.table(benchSteps(request))

const base = process.env.BASE_URL
if (!base) {
  console.log('Start the app (./docker-free-start.sh) and set BASE_URL to its address to time uploads and the history table.')
} else {
  await benchApp(base.replace(/\/$/, ''))
}

async function benchApp(url) {
  const cookie = await signIn(url)
  const call = async (path, init = {}) => {
    const answer = await fetch(url + path, { ...init, headers: { cookie, ...init.headers }, signal: AbortSignal.timeout(60_000) })
    if (!answer.ok) throw new Error(`${init.method ?? 'GET'} ${path}: ${answer.status} ${await answer.text()}`)
    return answer.json()
  }
  const instrument = await call('/api/instruments', { method: 'POST', headers: { 'content-type': 'application/json' }, body: JSON.stringify(benchInstrument(request)) })
  const headId = instrument.heads[0].id
  const upload = () => {
    const form = new FormData()
    form.set('file', new Blob([wav], { type: 'audio/wav' }), 'tap.wav')
    form.set('strike', 'edge')
    form.set('rod', '1')
    return call(`/api/heads/${headId}/recordings`, { method: 'POST', body: form })
  }
  console.table({
    'upload to reading, ms': await timed(UPLOADS, upload),
    'history, first page of 50, ms': await timed(PAGES, () => call('/api/readings?limit=50')),
  })
}

async function signIn(url) {
  const answer = await fetch(`${url}/api/auth/sign-in`, {
    method: 'POST',
    headers: { 'content-type': 'application/json' },
    body: JSON.stringify({ email: 'maker@rimwright.test', password: 'drumhead-demo' }),
    signal: AbortSignal.timeout(10_000),
  })
  if (!answer.ok) throw new Error(`Sign-in: ${answer.status}. The bench signs in as the demo's maker; start the app with its demo data.`)
  return answer.headers.getSetCookie().map(c => c.split(';')[0]).join('; ')
}

async function timed(count, work) {
  const times = []
  for (let i = 0; i < count; i++) {
    const start = performance.now()
    await work()
    times.push(performance.now() - start)
  }
  times.sort((a, b) => a - b)
  const at = share => Math.round(times[Math.floor(share * (count - 1))])
  return { runs: count, median: at(0.5), p95: at(0.95), slowest: at(1) }
}
