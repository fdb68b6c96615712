import workerUrl from '../../workers/analysis?node-worker'
import { log } from '../core/log'
import { createAnalysisPool, type AnalysisPool } from './pool'
import type { AnalysisOutcome, AnalysisRequest } from './types'
import { createUploadsFirst } from './uploadsFirst'

let pool: AnalysisPool | undefined
const queue = createUploadsFirst()

/** Starts the analysis threads; called at start-up so that the first upload finds one warm. */
export function startAnalysis(): AnalysisPool {
  // The worker's address is known only once the server runs, so not at module load.
  return pool ??= createAnalysisPool(workerUrl(), { behind: true, onError: error => log.error({ err: error }, 'analysis thread failed') })
}

/**
 * Reads a recording off the main thread.
 * @param background  lets every upload go first: begins only while none is being read, and one at a time
 * @throws AnalysisTimeoutError after a minute
 */
export function analyseInWorker(request: AnalysisRequest, { background = false } = {}): Promise<AnalysisOutcome> {
  return queue.take(background, () => startAnalysis().analyse(request))
}

/** Ends the analysis threads; for the server's close hook. */
export async function stopAnalysis() {
  await pool?.close()
  pool = undefined
}
