import { Piscina } from 'piscina'
import { BEHIND } from '../../workers/lowPriority'
import type { BothHeadsReading, HeadCalibration } from '../../../shared/types/reading'
import type { TappedReading } from './matchingBoth'
import type { KnownTension } from './matchingCalibration'
import type { AnalysedInstrument, AnalysisOutcome, AnalysisRequest } from './types'

export interface AnalysisPool {
  /** Reads a recording in a thread. The file's bytes move to the thread and are gone here. */
  analyse(request: AnalysisRequest): Promise<AnalysisOutcome>
  /** Both heads from stored readings of a tap on each, in a thread. */
  readBothHeads(instrument: AnalysedInstrument, taps: TappedReading[]): Promise<BothHeadsReading>
  /** What a stored reading at a known tension teaches, in a thread. */
  calibrate(known: KnownTension): Promise<HeadCalibration>
  /** Ends the threads; unfinished readings reject. */
  close(): Promise<void>
}

export interface PoolOptions {
  threads?: number
  timeLimitMs?: number
  /** Threads let everything else on the machine go first: for a server, whose own thread answers every request. */
  behind?: boolean
  /** Told of a thread that failed outside a reading; readings reject by themselves. */
  onError?: (error: unknown) => void
}

/** What the worker exports (server/workers/analysis.ts). */
type WorkerTask = 'default' | 'readBoth' | 'calibrateHead'

/** An analysis that took longer than it may; the recording is at fault, not the caller. */
export class AnalysisTimeoutError extends Error {
  constructor(timeLimitMs: number) {
    super(`The analysis of the recording took longer than ${timeLimitMs / 1000} s and was stopped.`)
    this.name = 'AnalysisTimeoutError'
  }
}

const TIME_LIMIT_MS = 60_000
/** A new thread compiles the analysis and plans its transforms; one is kept ready so that no upload waits for that. */
const MIN_THREADS = 1
const MAX_THREADS = 2
/** Sound of 50 MB as numbers and its low band, several times over. */
const MAX_HEAP_MB = 1024

/**
 * Threads that analyse recordings, so that a long one never holds up the server.
 * @param workerUrl  the bundled worker: from `?node-worker` in the server, from a file in a script
 */
export function createAnalysisPool(workerUrl: URL, options: PoolOptions = {}): AnalysisPool {
  const timeLimitMs = options.timeLimitMs ?? TIME_LIMIT_MS
  const maxThreads = options.threads ?? MAX_THREADS
  const piscina = new Piscina({
    filename: workerUrl.href,
    minThreads: Math.min(MIN_THREADS, maxThreads),
    maxThreads,
    idleTimeout: 60_000,
    resourceLimits: { maxOldGenerationSizeMb: MAX_HEAP_MB },
    argv: options.behind ? [BEHIND] : [],
  })
  // Without a listener a thread that cannot start would end the whole process.
  piscina.on('error', error => options.onError?.(error))
  async function run<T>(name: WorkerTask, input: unknown, transferList: ArrayBuffer[] = []): Promise<T> {
    const limit = new AbortController()
    const timer = setTimeout(() => limit.abort(), timeLimitMs)
    try {
      return await piscina.run(input, { name, transferList, signal: limit.signal }) as T
    } catch (error) {
      throw limit.signal.aborted ? new AnalysisTimeoutError(timeLimitMs) : error
    } finally {
      clearTimeout(timer)
    }
  }
  return {
    analyse(request) {
      const wav = ownBytes(request.wav)
      return run<AnalysisOutcome>('default', { ...request, wav }, [wav.buffer])
    },
    readBothHeads: (instrument, taps) => run<BothHeadsReading>('readBoth', { instrument, taps }),
    calibrate: known => run<HeadCalibration>('calibrateHead', known),
    close: () => piscina.destroy(),
  }
}

/** A view that fills its buffer can be moved; a part of a larger one (Node's shared pool) must be copied first. */
function ownBytes(bytes: Uint8Array): Uint8Array<ArrayBuffer> {
  const { buffer } = bytes
  return buffer instanceof ArrayBuffer && buffer.byteLength === bytes.byteLength ? new Uint8Array(buffer) : new Uint8Array(bytes)
}
