import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import nodemailer from 'nodemailer'
import { afterEach, describe, expect, it } from 'vitest'
import { startMailServer, type MailServer } from '../../../local/mail/server'

describe('mail stand-in', () => {
  const stops: (() => Promise<unknown>)[] = []
  afterEach(async () => {
    for (const stop of stops.splice(0).reverse()) await stop()
  })
  const start = async (stateFile?: string) => {
    const server = await startMailServer({ stateFile })
    stops.push(() => server.stop())
    return server
  }
  const send = (server: MailServer, mail: object) => nodemailer.createTransport(server.smtpUrl).sendMail({ from: 'Tarn & Alder <shop@rimwright.test>', ...mail })
  const messages = async (server: MailServer) => await (await fetch(`${server.inboxUrl}/messages`)).json() as { to: string, subject: string, text: string, html: string | null, at: string }[]

  it('shows what came over SMTP, newest first, decoded', async () => {
    const server = await start()
    await send(server, { to: 'ann@rimwright.test', subject: 'First', text: 'One' })
    await send(server, { to: 'Bo <bo@rimwright.test>', subject: 'Fell gestimmt: 3120 N/m ± 62', text: 'Grüße', html: '<p>Grüße</p>' })
    const [second, first] = await messages(server)
    expect(second).toMatchObject({ to: 'bo@rimwright.test', subject: 'Fell gestimmt: 3120 N/m ± 62', html: expect.stringContaining('<p>Grüße</p>') as string })
    expect(second!.text.trim()).toBe('Grüße')
    expect(first).toMatchObject({ to: 'ann@rimwright.test', subject: 'First', html: null })
    expect(new Date(second!.at).toISOString()).toBe(second!.at)
  })

  it('forgets them when asked to', async () => {
    const server = await start()
    await send(server, { to: 'ann@rimwright.test', subject: 'First', text: 'One' })
    await fetch(`${server.inboxUrl}/messages`, { method: 'DELETE' })
    expect(await messages(server)).toEqual([])
  })

  it('remembers them over a restart', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'rimwright-mail-'))
    stops.push(() => rm(folder, { recursive: true }))
    const first = await start(join(folder, 'mail.json'))
    await send(first, { to: 'ann@rimwright.test', subject: 'Kept', text: 'One' })
    await first.stop()
    expect((await messages(await start(join(folder, 'mail.json')))).map(mail => mail.subject)).toEqual(['Kept'])
  })

  it('shows a mail\'s HTML only in a frame without scripts', async () => {
    const server = await start()
    await send(server, { to: 'ann@rimwright.test', subject: '<script>alert(1)</script>', html: '<script>alert(2)</script>', text: 'x' })
    const page = await (await fetch(server.inboxUrl)).text()
    expect(page).not.toContain('<script>')
    expect(page).toContain('<iframe sandbox ')
  })
})
