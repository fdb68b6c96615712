import { lastLines } from './files'
import type { Child } from './children'

// A first start on a busy machine is slow; one that will never be healthy ends by itself long before.
const LIMIT_MS = 180_000
const PAUSE_MS = 100

/** Waits until the app answers 200. @throws Error with the end of its log when it ends or never does */
export async function waitForHealth(url: string, app: Child): Promise<void> {
  const end = Date.now() + LIMIT_MS
  while (app.isRunning() && Date.now() < end) {
    const response = await fetch(url, { signal: AbortSignal.timeout(5_000) }).catch(() => undefined)
    await response?.arrayBuffer().catch(() => undefined)
    if (response?.ok) return
    await new Promise(resolve => setTimeout(resolve, PAUSE_MS))
  }
  const what = app.isRunning() ? `did not become healthy within ${LIMIT_MS / 1000} s` : `ended while starting (${await app.ended})`
  throw new Error(`The app ${what}. Its log, ${app.logFile}, ends:\n${lastLines(app.logFile)}`)
}
