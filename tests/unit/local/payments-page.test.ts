import type Stripe from 'stripe'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { ORDER, startPayments, startReceiver } from './payment-kit'

describe('payment stand-in: page', () => {
  let payments: Awaited<ReturnType<typeof startPayments>>
  let receiver: Awaited<ReturnType<typeof startReceiver>>
  let session: Stripe.Checkout.Session
  beforeAll(async () => {
    receiver = await startReceiver()
    payments = await startPayments({ webhookUrl: receiver.url })
  })
  afterAll(async () => {
    await payments.server.stop()
    await receiver.stop()
  })
  beforeEach(async () => {
    receiver.received.length = 0
    session = await payments.stripe.checkout.sessions.create(ORDER)
  })
  const press = (action: string, headers: Record<string, string> = {}) =>
    fetch(String(session.url), { method: 'POST', body: new URLSearchParams({ action }), redirect: 'manual', headers })
  const status = async () => (await payments.stripe.checkout.sessions.retrieve(session.id)).payment_status

  it('says that no money moves, shows what is paid and runs no script', async () => {
    const html = await (await fetch(String(session.url))).text()
    expect(html).toContain('Local payment stand-in: no money moves')
    expect(html).toContain('14 in head, PET 250 µm × 2')
    expect(html).toMatch(/EUR\s115\.00/)
    expect(html).not.toContain('<script')
  })

  it('pays, tells the shop, then leads to the success address with the session id', async () => {
    const response = await press('pay')
    expect(response.status).toBe(303)
    expect(response.headers.get('location')).toBe(`http://127.0.0.1:3000/orders/1?session=${session.id}`)
    expect(receiver.received.map(({ event }) => event.type)).toEqual(['checkout.session.completed'])
  })

  it('shows a declined card on the same page', async () => {
    const response = await press('decline')
    const html = await (await fetch(new URL(String(response.headers.get('location')), payments.server.url))).text()
    expect(html).toContain('The card was declined. Nothing was charged.')
    expect(await status()).toBe('unpaid')
  })

  it('charges nothing until the second step is confirmed', async () => {
    const response = await press('second-step')
    const html = await (await fetch(new URL(String(response.headers.get('location')), payments.server.url))).text()
    expect(html).toContain('Second step')
    expect(await status()).toBe('unpaid')
    await press('confirm')
    expect(await status()).toBe('paid')
  })

  it('charges nothing when the second step is refused', async () => {
    await press('second-step')
    await press('refuse')
    expect(await status()).toBe('unpaid')
    expect(receiver.received.map(({ event }) => event.type)).toEqual(['payment_intent.payment_failed'])
  })

  it('offers the way back without paying', async () => {
    expect(await (await fetch(String(session.url))).text()).toContain('Go back without paying')
  })

  it('refuses a button pressed from another site', async () => {
    expect((await press('pay', { 'sec-fetch-site': 'cross-site' })).status).toBe(403)
    expect(await status()).toBe('unpaid')
  })

  it('escapes what the shop sends', async () => {
    const item = { quantity: 1, price_data: { currency: 'eur', unit_amount: 900, product_data: { name: '<b>"head"</b>' } } }
    const made = await payments.stripe.checkout.sessions.create({ ...ORDER, line_items: [item] })
    const html = await (await fetch(String(made.url))).text()
    expect(html).not.toContain('<b>"head"')
    expect(html).toContain('&#60;b&#62;&#34;head&#34;')
  })
})
