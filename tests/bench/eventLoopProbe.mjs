// Watches how late the app's event loop runs its timers; loaded into the app by NODE_OPTIONS (see uploadLoad.ts).
// Says where it lives in DATA_DIR/logs/event-loop.pid; on SIGUSR2 writes what it saw since the last one, in ms.
import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { monitorEventLoopDelay } from 'node:perf_hooks'
import { isMainThread } from 'node:worker_threads'

if (isMainThread && process.argv.some(argument => argument.endsWith('.output/server/index.mjs'))) {
  const folder = join(process.env.DATA_DIR ?? '.data', 'logs')
  const delay = monitorEventLoopDelay({ resolution: 2 })
  delay.enable()
  writeFileSync(join(folder, 'event-loop.pid'), String(process.pid))
  process.on('SIGUSR2', () => {
    // The histogram holds intervals between timers of 2 ms: what is over that is delay.
    const ms = nanoseconds => Math.max(0, Math.round(nanoseconds / 1e5) / 10 - 2)
    writeFileSync(join(folder, 'event-loop.json'), JSON.stringify({ p50: ms(delay.percentile(50)), p99: ms(delay.percentile(99)), max: ms(delay.max) }))
    delay.reset()
  })
}
