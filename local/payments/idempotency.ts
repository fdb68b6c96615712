import { createHash } from 'node:crypto'
import { ApiError, invalidRequest } from './apiError'
import type { BookContent } from './book'

// Longest key by docs.stripe.com/api/idempotent_requests.
const MAX_KEY = 255

/** What makes two requests the same: method, path and parameters. */
export function fingerprint(method: string, path: string, body: string): string {
  return createHash('sha256').update(`${method} ${path}\n${body}`).digest('hex')
}

/**
 * The answer that the same key got before, if any.
 * @throws ApiError when the key came with other parameters before
 */
export function findReplay(book: BookContent, key: string, print: string): { status: number, body: string } | undefined {
  if (key.length > MAX_KEY) throw invalidRequest(`Idempotency keys can be at most ${MAX_KEY} characters.`)
  const replay = book.replays[key]
  if (replay && replay.fingerprint !== print) {
    throw new ApiError(400, {
      type: 'idempotency_error',
      message: `Keys for idempotent requests can only be used with the same parameters they were first used with. Try using a key other than '${key}' if you meant to execute a different request.`,
    })
  }
  return replay
}

/** Remembers an answer. Requests refused for their parameters are not remembered: nothing was executed. */
export function rememberReplay(book: BookContent, key: string, replay: { fingerprint: string, status: number, body: string, at: number }): void {
  book.replays[key] = replay
}
