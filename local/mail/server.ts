/**
 * A local process in place of a mail service: takes mail over SMTP and shows it over HTTP.
 *
 * Security model: both listen on 127.0.0.1 only, and nothing is sent on. Whoever may use this machine may read the
 * mails. Their HTML is foreign: it is shown in a sandboxed frame without scripts.
 */
import { createServer, type ServerResponse } from 'node:http'
import type { AddressInfo } from 'node:net'
import { SMTPServer } from 'smtp-server'
import { Inbox } from './inbox'
import { inboxPage } from './page'

export interface MailServer {
  smtpUrl: string
  inboxUrl: string
  stop: () => Promise<void>
}

const MAX_MAIL_BYTES = 20 * 1024 * 1024

/** Starts both servers. Port 0 lets the system choose. */
export async function startMailServer(options: { stateFile?: string, smtpPort?: number, httpPort?: number } = {}): Promise<MailServer> {
  const inbox = new Inbox(options.stateFile)
  const smtp = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS'],
    size: MAX_MAIL_BYTES,
    disableReverseLookup: true,
    closeTimeout: 1000,
    onData(stream, session, done) {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('error', done)
      stream.on('end', () => {
        if (stream.sizeExceeded) return done(Object.assign(new Error('Message too large'), { responseCode: 552 }))
        inbox.add(Buffer.concat(chunks), session.envelope.rcptTo.map(recipient => recipient.address)).then(() => done(), done)
      })
    },
  })
  // A client that drops its connection is no reason to end.
  smtp.on('error', (error: NodeJS.ErrnoException) => console.error(`SMTP: ${error.message}`))

  const http = createServer((request, response) => {
    const { pathname } = new URL(request.url ?? '/', 'http://127.0.0.1')
    if (pathname === '/messages' && request.method === 'GET') return json(response, 200, inbox.list())
    if (pathname === '/messages' && request.method === 'DELETE') return void inbox.clear().then(() => json(response, 200, []))
    if (pathname === '/' && request.method === 'GET') return html(response, inboxPage(inbox.list()))
    json(response, 404, { message: 'The local mail stand-in has / and /messages.' })
  })

  const smtpPort = await listen(smtp.server, options.smtpPort ?? 0)
  const httpPort = await listen(http, options.httpPort ?? 0)
  const stop = async () => {
    await Promise.all([
      new Promise<void>(resolve => smtp.close(() => resolve())),
      new Promise<void>((resolve) => {
        http.close(() => resolve())
        http.closeAllConnections()
      }),
    ])
    await inbox.save()
  }
  return { smtpUrl: `smtp://127.0.0.1:${smtpPort}`, inboxUrl: `http://127.0.0.1:${httpPort}`, stop }
}

function listen(server: { listen: (port: number, host: string, done: () => void) => unknown, once: (event: 'error', listener: (error: Error) => void) => unknown, address: () => unknown }, port: number): Promise<number> {
  return new Promise((resolve, reject) => {
    server.once('error', reject)
    server.listen(port, '127.0.0.1', () => resolve((server.address() as AddressInfo).port))
  })
}

function json(response: ServerResponse, status: number, body: unknown): void {
  response.writeHead(status, { 'content-type': 'application/json; charset=utf-8', 'cache-control': 'no-store' }).end(JSON.stringify(body))
}

function html(response: ServerResponse, text: string): void {
  response.writeHead(200, {
    'content-type': 'text/html; charset=utf-8', 'cache-control': 'no-store', 'x-content-type-options': 'nosniff',
    'content-security-policy': 'default-src \'none\'; style-src \'unsafe-inline\'; img-src data:; frame-src \'self\'; frame-ancestors \'none\'; base-uri \'none\'',
  }).end(text)
}
