/**
 * A local process in place of the payment service, for one machine without keys: it answers the documented calls that
 * the official SDK makes, shows a payment page and sends signed webhooks. No money moves.
 *
 * Security model: listens on 127.0.0.1 only. Calls under /v1 need the secret key. The payment page and the script
 * routes need none, as whoever may use this machine may play the customer and the bank; pages of other sites may not,
 * so a browser's cross-site posts are refused.
 */
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http'
import type { AddressInfo } from 'node:net'
import qs from 'qs'
import { Actions } from './actions'
import { Api, type ApiRequest } from './api'
import { ApiError } from './apiError'
import { Book, newId } from './book'
import { fingerprint, findReplay, rememberReplay } from './idempotency'
import { overviewPage, problemPage } from './pages'
import { answerPay } from './payRoutes'
import { runScripted } from './scripted'
import { Webhooks } from './webhooks'

export interface PaymentServerOptions {
  secretKey: string
  webhookSecret: string
  webhookUrl?: string
  /** Where to remember; without it, in memory only. */
  stateFile?: string
  retryDelaysMs?: number[]
  now?: () => number
}

export interface PaymentServer {
  url: string
  port: number
  stop: () => Promise<void>
}

const API_VERSION = '2026-10-28.endive'
const MAX_BODY_BYTES = 1024 * 1024
const SWEEP_MS = 2_000

/** Starts the stand-in. Port 0 lets the system choose. */
export async function startPaymentServer(options: PaymentServerOptions, port = 0): Promise<PaymentServer> {
  const now = options.now ?? Date.now
  const book = new Book(options.stateFile, now)
  const webhooks = new Webhooks(book, { url: options.webhookUrl, secret: options.webhookSecret, apiVersion: API_VERSION, retryDelaysMs: options.retryDelaysMs, now })
  const actions = new Actions(book, webhooks, now)
  let base = ''
  const api = new Api({ book, actions, webhooks, base: () => base, now })
  const deps = { book, actions, webhooks }

  const server: Server = createServer((request, response) => {
    answer(request, response).catch((error: unknown) => {
      console.error(error)
      if (!response.headersSent) json(response, 500, { error: { type: 'api_error', message: 'The payment stand-in failed. Its log says why.' } })
      else response.destroy()
    })
  })
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject)
    server.listen(port, '127.0.0.1', resolve)
  })
  base = `http://127.0.0.1:${(server.address() as AddressInfo).port}`
  const sweep = setInterval(() => void expireOverdue(), SWEEP_MS)
  webhooks.resume()

  async function answer(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const url = new URL(request.url ?? '/', base)
    const method = request.method ?? 'GET'
    const body = await readBody(request)
    if (body === undefined) return json(response, 413, { error: { type: 'invalid_request_error', message: 'The request body is too large.' } })
    if (url.pathname.startsWith('/v1/')) return answerApi(request, response, { method, path: url.pathname, query: url.search.slice(1), body })
    if (method === 'POST' && request.headers['sec-fetch-site'] === 'cross-site') return html(response, 403, problemPage('Refused', 'Another site asked for this.'))
    if (url.pathname.startsWith('/pay/') && (method === 'GET' || method === 'POST')) {
      const page = await answerPay(method, url.pathname, url.searchParams, qs.parse(body), deps)
      return 'redirect' in page ? redirect(response, page.redirect) : html(response, page.status, page.html)
    }
    if (url.pathname.startsWith('/stand-in/') && method === 'POST') return answerScripted(request, response, url.pathname)
    if (url.pathname === '/' && method === 'GET') return html(response, 200, overviewPage(book.content))
    html(response, 404, problemPage('Nothing here', 'The local payment stand-in has no such page.'))
  }

  async function answerScripted(request: IncomingMessage, response: ServerResponse, path: string): Promise<void> {
    try {
      const result = await runScripted(path, deps)
      if (!result) return json(response, 404, { error: { type: 'invalid_request_error', message: `The stand-in cannot ${path}.` } })
      await book.save()
      if (request.headers.accept?.includes('text/html')) redirect(response, '/')
      else json(response, 200, result)
    } catch (error) {
      if (!(error instanceof ApiError)) throw error
      json(response, error.status, { error: error.body })
    }
  }

  async function answerApi(request: IncomingMessage, response: ServerResponse, call: Pick<ApiRequest, 'method' | 'path' | 'query' | 'body'>): Promise<void> {
    const requestId = newId('req_', 14)
    const header = request.headers['idempotency-key']
    const key = call.method === 'POST' && typeof header === 'string' && header ? header : null
    const headers: Record<string, string> = { 'request-id': requestId, 'stripe-version': String(request.headers['stripe-version'] ?? API_VERSION) }
    if (key) headers['idempotency-key'] = key
    const print = fingerprint(call.method, call.path, call.body)
    try {
      checkKey(request)
      const replay = key ? findReplay(book.content, key, print) : undefined
      if (replay) return send(response, replay.status, replay.body, { ...headers, 'idempotent-replayed': 'true' })
      const { body, events } = api.handle({ ...call, requestId, idempotencyKey: key })
      const text = JSON.stringify(body, null, 2)
      if (key) rememberReplay(book.content, key, { fingerprint: print, status: 200, body: text, at: now() })
      if (call.method === 'POST') await book.save()
      send(response, 200, text, headers)
      // After the answer, as the real service does: the caller may still hold locks that its webhook route wants.
      for (const event of events ?? []) void webhooks.send(event)
    } catch (error) {
      if (!(error instanceof ApiError)) throw error
      send(response, error.status, JSON.stringify({ error: error.body }, null, 2), headers)
    }
  }

  function checkKey(request: IncomingMessage): void {
    const [scheme, value] = (request.headers.authorization ?? '').split(' ')
    const given = scheme === 'Basic' ? Buffer.from(value ?? '', 'base64').toString().split(':')[0] : scheme === 'Bearer' ? value : undefined
    if (given === options.secretKey) return
    const message = given ? `Invalid API Key provided: ${given.slice(0, 7)}${'*'.repeat(8)}` : 'You did not provide an API key. Provide it in the Authorization header, as Bearer.'
    throw new ApiError(401, { type: 'invalid_request_error', message })
  }

  async function expireOverdue(): Promise<void> {
    const overdue = Object.values(book.content.sessions).filter(({ session }) => session.status === 'open' && session.expires_at * 1000 <= now())
    const events = overdue.map(booked => actions.expire(booked))
    if (events.length) await book.save()
    for (const event of events) void webhooks.send(event)
  }

  const stop = async () => {
    clearInterval(sweep)
    webhooks.stop()
    await new Promise<void>((resolve) => {
      server.close(() => resolve())
      server.closeAllConnections()
    })
    await book.save()
  }
  return { url: base, port: Number(new URL(base).port), stop }
}

function readBody(request: IncomingMessage): Promise<string | undefined> {
  return new Promise((resolve, reject) => {
    const chunks: Buffer[] = []
    let size = 0
    request.on('data', (chunk: Buffer) => {
      size += chunk.length
      if (size <= MAX_BODY_BYTES) chunks.push(chunk)
    })
    request.on('end', () => resolve(size > MAX_BODY_BYTES ? undefined : Buffer.concat(chunks).toString('utf8')))
    request.on('error', reject)
  })
}

function send(response: ServerResponse, status: number, text: string, headers: Record<string, string>): void {
  response.writeHead(status, { 'content-type': 'application/json', 'cache-control': 'no-store', ...headers }).end(text)
}

function json(response: ServerResponse, status: number, body: object): void {
  send(response, status, JSON.stringify(body), {})
}

function html(response: ServerResponse, status: number, text: string): void {
  response.writeHead(status, {
    'content-type': 'text/html; charset=utf-8', 'cache-control': 'no-store', 'x-content-type-options': 'nosniff',
    'content-security-policy': 'default-src \'none\'; style-src \'unsafe-inline\'; img-src data:; frame-ancestors \'none\'; base-uri \'none\'',
  }).end(text)
}

function redirect(response: ServerResponse, to: string): void {
  response.writeHead(303, { 'location': to, 'cache-control': 'no-store' }).end()
}
