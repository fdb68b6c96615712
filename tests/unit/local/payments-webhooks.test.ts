import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import Stripe from 'stripe'
import { afterEach, describe, expect, it } from 'vitest'
import { ORDER, startPayments, startReceiver, until, WEBHOOK_SECRET } from './payment-kit'
import type { PaymentServerOptions } from '../../../local/payments/server'

describe('payment stand-in: webhooks', () => {
  const stops: (() => Promise<unknown>)[] = []
  afterEach(async () => {
    for (const stop of stops.splice(0).reverse()) await stop()
  })
  const start = async (statuses: number[] = [], options: Partial<PaymentServerOptions> = {}) => {
    const receiver = await startReceiver(statuses)
    const payments = await startPayments({ webhookUrl: receiver.url, retryDelaysMs: [20, 20, 20], ...options })
    stops.push(() => receiver.stop(), () => payments.server.stop())
    return { ...payments, received: receiver.received }
  }

  it('sends a signature that the SDK verifies, and that a changed body fails', async () => {
    const { stripe, script, received } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    await script(`sessions/${session.id}/pay`)
    const { body, signature } = received[0]!
    expect(stripe.webhooks.constructEvent(body, signature, WEBHOOK_SECRET).type).toBe('checkout.session.completed')
    expect(() => stripe.webhooks.constructEvent(body.replace('11500', '11400'), signature, WEBHOOK_SECRET)).toThrow(Stripe.errors.StripeSignatureVerificationError)
    expect(() => stripe.webhooks.constructEvent(body, signature, 'whsec_other')).toThrow(Stripe.errors.StripeSignatureVerificationError)
  })

  it('pays: session, intent and charge agree, and the event carries the paid session', async () => {
    const { stripe, script, received } = await start()
    const made = await stripe.checkout.sessions.create({ ...ORDER, payment_intent_data: { metadata: { orderId: 'order-1' } } })
    const { status, body } = await script(`sessions/${made.id}/pay`)
    expect([status, body.delivered]).toEqual([200, true])
    const session = await stripe.checkout.sessions.retrieve(made.id)
    expect(session).toMatchObject({ status: 'complete', payment_status: 'paid', url: null })
    const intent = await stripe.paymentIntents.retrieve(String(session.payment_intent), { expand: ['latest_charge'] })
    expect(intent).toMatchObject({ status: 'succeeded', amount: 11_500, amount_received: 11_500, currency: 'eur', metadata: { orderId: 'order-1' } })
    expect(intent.latest_charge).toMatchObject({ object: 'charge', paid: true, amount: 11_500, status: 'succeeded' })
    expect(received.map(({ event }) => event.data.object)).toMatchObject([{ id: made.id, payment_status: 'paid', amount_total: 11_500 }])
  })

  it('refuses to pay a session twice, and sends nothing for the second try', async () => {
    const { stripe, script, received } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    await script(`sessions/${session.id}/pay`)
    const second = await script(`sessions/${session.id}/pay`)
    expect(second.status).toBe(400)
    expect(received).toHaveLength(1)
  })

  it('declines: nothing is paid, the session stays open, and paying then works', async () => {
    const { stripe, script, received } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    const declined = await script(`sessions/${session.id}/decline`)
    expect(declined.body.session).toMatchObject({ status: 'open', payment_status: 'unpaid' })
    expect(received[0]!.event).toMatchObject({ type: 'payment_intent.payment_failed', data: { object: { last_payment_error: { code: 'card_declined' }, amount_received: 0 } } })
    const paid = await script(`sessions/${session.id}/pay`)
    expect(paid.body.session.payment_intent).toBe(declined.body.session.payment_intent)
    expect(paid.body.session.payment_status).toBe('paid')
  })

  it.each([['settle', 'checkout.session.async_payment_succeeded', 'paid'], ['fail', 'checkout.session.async_payment_failed', 'unpaid']])(
    'pays later, then %s: completed unpaid first, then %s', async (verb, type, paymentStatus) => {
      const { stripe, script, received } = await start()
      const session = await stripe.checkout.sessions.create(ORDER)
      await script(`sessions/${session.id}/pay-later`)
      await script(`sessions/${session.id}/${verb}`)
      expect(received.map(({ event }) => event.type)).toEqual(['checkout.session.completed', type])
      expect(received[0]!.event.data.object).toMatchObject({ status: 'complete', payment_status: 'unpaid' })
      expect(received[1]!.event.data.object).toMatchObject({ status: 'complete', payment_status: paymentStatus })
    })

  it('expires through the API once, and tells of it', async () => {
    const { stripe, received, script } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    expect((await stripe.checkout.sessions.expire(session.id)).status).toBe('expired')
    await until(() => received.length === 1)
    expect(received[0]!.event.type).toBe('checkout.session.expired')
    await expect(stripe.checkout.sessions.expire(session.id)).rejects.toMatchObject({ statusCode: 400 })
    expect((await script(`sessions/${session.id}/pay`)).status).toBe(400)
  })

  it('expires by itself when its time has come', async () => {
    let now = Date.now()
    const { stripe, received } = await start([], { now: () => now })
    const session = await stripe.checkout.sessions.create({ ...ORDER, expires_at: Math.floor(now / 1000) + 1800 })
    now += 1801_000
    await until(() => received.length === 1)
    expect(received[0]!.event).toMatchObject({ type: 'checkout.session.expired', data: { object: { id: session.id, status: 'expired' } } })
  })

  it('refunds in parts, never more than is left, and tells of each', async () => {
    const { stripe, script, received } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    const paid = await script(`sessions/${session.id}/pay`)
    const intent = String(paid.body.session.payment_intent)
    const part = await stripe.refunds.create({ payment_intent: intent, amount: 1500, metadata: { refundId: 'r1' } }, { idempotencyKey: 'refund-1' })
    const replay = await stripe.refunds.create({ payment_intent: intent, amount: 1500, metadata: { refundId: 'r1' } }, { idempotencyKey: 'refund-1' })
    expect(replay.id).toBe(part.id)
    expect(part).toMatchObject({ object: 'refund', amount: 1500, status: 'succeeded', metadata: { refundId: 'r1' } })
    await expect(stripe.refunds.create({ payment_intent: intent, amount: 10_001 })).rejects.toMatchObject({ statusCode: 400, param: 'amount' })
    const rest = await stripe.refunds.create({ payment_intent: intent })
    expect(rest.amount).toBe(10_000)
    await expect(stripe.refunds.create({ payment_intent: intent })).rejects.toMatchObject({ code: 'charge_already_refunded' })
    await until(() => received.length === 7)
    expect(received.slice(1, 4).map(({ event }) => event.type).sort()).toEqual(['charge.refunded', 'refund.created', 'refund.updated'])
    expect((await stripe.refunds.retrieve(part.id)).amount).toBe(1500)
  })

  it('does not refund what was not paid', async () => {
    const { stripe, script } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    const declined = await script(`sessions/${session.id}/decline`)
    await expect(stripe.refunds.create({ payment_intent: String(declined.body.session.payment_intent) })).rejects.toMatchObject({ statusCode: 400 })
  })

  it('opens a dispute, after which the charge cannot be refunded', async () => {
    const { stripe, script, received } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    const paid = await script(`sessions/${session.id}/pay`)
    await script(`sessions/${session.id}/dispute`)
    expect(received[1]!.event).toMatchObject({ type: 'charge.dispute.created', data: { object: { amount: 11_500, payment_intent: paid.body.session.payment_intent } } })
    await expect(stripe.refunds.create({ payment_intent: String(paid.body.session.payment_intent) })).rejects.toMatchObject({ code: 'charge_disputed' })
  })

  it('retries the same event after 500 until it is taken', async () => {
    const { stripe, script, received } = await start([500, 500])
    const session = await stripe.checkout.sessions.create(ORDER)
    expect((await script(`sessions/${session.id}/pay`)).body.delivered).toBe(false)
    await until(() => received.length === 3)
    expect(new Set(received.map(({ event }) => event.id)).size).toBe(1)
    const event = await stripe.events.retrieve(received[0]!.event.id)
    expect(event.pending_webhooks).toBe(0)
  })

  it('gives up after the last retry, and sends again when asked to', async () => {
    const { stripe, script, received } = await start([500, 500, 500, 500])
    const session = await stripe.checkout.sessions.create(ORDER)
    await script(`sessions/${session.id}/pay`)
    await until(() => received.length === 4)
    await new Promise(resolve => setTimeout(resolve, 100))
    expect(received).toHaveLength(4)
    const resent = await script(`events/${received[0]!.event.id}/resend`)
    expect(resent.body.delivered).toBe(true)
    expect(received[4]!.event.id).toBe(received[0]!.event.id)
  })

  it('remembers sessions and undelivered events over a restart', async () => {
    const folder = await mkdtemp(join(tmpdir(), 'rimwright-payments-'))
    stops.push(() => rm(folder, { recursive: true }))
    const stateFile = join(folder, 'payments.json')
    const first = await start([500], { stateFile, retryDelaysMs: [60_000] })
    const session = await first.stripe.checkout.sessions.create(ORDER, { idempotencyKey: 'order-1' })
    await first.script(`sessions/${session.id}/pay`)
    await first.server.stop()
    const second = await start([], { stateFile })
    await until(() => second.received.length === 1)
    expect(second.received[0]!.event.data.object).toMatchObject({ id: session.id, payment_status: 'paid' })
    expect((await second.stripe.checkout.sessions.create(ORDER, { idempotencyKey: 'order-1' })).id).toBe(session.id)
  })

  it('lists events by type, newest first', async () => {
    const { stripe, script } = await start()
    const session = await stripe.checkout.sessions.create(ORDER)
    await script(`sessions/${session.id}/decline`)
    await script(`sessions/${session.id}/pay`)
    expect((await stripe.events.list()).data.map(event => event.type)).toEqual(['checkout.session.completed', 'payment_intent.payment_failed'])
    expect((await stripe.events.list({ type: 'payment_intent.payment_failed' })).data).toHaveLength(1)
  })
})
