import { randomUUID } from 'node:crypto'
import type { H3Event } from 'h3'
import type { z } from 'zod'
import type { Role, SignedInUser } from '../../../shared/types/roles'
import { DomainError, errorStatus, type FieldIssue } from './errors'
import { log } from './log'
import { parseInput } from './parse'
import { requireUser } from '../people/session'

/*
 * Security model: a route states who may call it, or it does not compile. The role is read from the database on each
 * request; ownership stands in each query's WHERE clause. Bodies are small JSON unless the route reads its own stream.
 */
export type Access = 'public' | 'signed-in' | readonly Role[]

interface RouteOptions<A extends Access, P, Q, B> {
  access: A
  params?: z.ZodType<P>
  query?: z.ZodType<Q>
  body?: z.ZodType<B>
  /** Status of success, when not 200. */
  status?: number
  handler: (context: { event: H3Event, user: A extends 'public' ? null : SignedInUser, params: P, query: Q, body: B }) => Promise<unknown>
}

/** 256 kB holds the largest JSON body that any schema here lets through, many times. */
const MAX_JSON_BYTES = 256 * 1024

export function defineRoute<const A extends Access, P = undefined, Q = undefined, B = undefined>(options: RouteOptions<A, P, Q, B>) {
  return defineEventHandler(async (event) => {
    try {
      refuseForeignOrigin(event)
      const user = options.access === 'public' ? null : await requireUser(event, options.access)
      const params = options.params ? parseInput(options.params, getRouterParams(event, { decode: true })) : undefined
      const query = options.query ? parseInput(options.query, getQuery(event)) : undefined
      const body = options.body ? parseInput(options.body, await readJson(event)) : undefined
      const answer = await options.handler({ event, user: user as never, params: params as P, query: query as Q, body: body as B })
      if (options.status && getResponseStatus(event) === 200) setResponseStatus(event, options.status)
      return answer
    } catch (error) {
      return answerError(event, error)
    }
  })
}

async function readJson(event: H3Event): Promise<unknown> {
  if (Number(getRequestHeader(event, 'content-length') ?? 0) > MAX_JSON_BYTES) throw new DomainError('too-large', 'This request is too large.')
  const type = getRequestHeader(event, 'content-type') ?? ''
  if (!/^application\/json\b/i.test(type)) throw new DomainError('wrong-media-type', 'Send the request as JSON (content-type: application/json).')
  const text = await readRawBody(event, 'utf8')
  if (text && text.length > MAX_JSON_BYTES) throw new DomainError('too-large', 'This request is too large.')
  try {
    return text ? JSON.parse(text) : {}
  } catch {
    throw new DomainError('bad-input', 'The request is not valid JSON.')
  }
}

/** Browsers send Origin with every cross-site write; scripts with a cookie of their own send none. */
function refuseForeignOrigin(event: H3Event): void {
  if (event.method === 'GET' || event.method === 'HEAD') return
  const origin = getRequestHeader(event, 'origin')
  if (!origin) return
  const host = getRequestHeader(event, 'host')
  if (origin !== 'null' && URL.canParse(origin) && new URL(origin).host === host) return
  throw new DomainError('not-allowed', 'This request came from another site. Open Rimwright itself and try again.')
}

export interface ErrorBody { statusCode: number, statusMessage: string, message: string, data?: { issues?: FieldIssue[], requestId?: string } }

function answerError(event: H3Event, error: unknown): ErrorBody {
  const { statusCode, statusMessage, message, data } = describeError(error)
  setResponseStatus(event, statusCode, statusMessage)
  return { statusCode, statusMessage, message, ...(data && { data }) }
}

/** What the caller may know of an error. Faults of ours keep their details for the log, under the id that the caller gets. */
export function describeError(error: unknown): ErrorBody {
  if (error instanceof DomainError) {
    const [statusCode, statusMessage] = errorStatus[error.code]
    return { statusCode, statusMessage, message: error.message, ...(error.issues && { data: { issues: error.issues } }) }
  }
  const requestId = randomUUID()
  log.error({ err: error, requestId }, 'request failed')
  return { statusCode: 500, statusMessage: 'Internal Server Error', message: `Something failed on our side. Try again; if it stays, give the workshop this number: ${requestId}.`, data: { requestId } }
}
