import { beforeAll, describe, expect, it } from 'vitest'
import { completed, newEventId, openOrder, paidSession, readOrder, sendEvent, whileInsertsFail, type OpenOrder, type Shopper } from '../support/shop'
import { database, eventually, mailsTo, playPayment, signInAs } from '../support/stack'

describe('events of the payment service', () => {
  let customer: Shopper
  let order: OpenOrder
  beforeAll(async () => {
    customer = await signInAs('customer')
  })
  const fresh = async () => order = await openOrder(customer)
  const unchanged = async () => {
    const seen = await readOrder(customer, order.id)
    expect(seen).toMatchObject({ status: 'awaiting-payment', payments: [], paidMinor: 0 })
    expect(seen.history).toHaveLength(1)
  }
  const knows = async (eventId: string) => Boolean(await database().selectFrom('webhook_events').select('id').where('id', '=', eventId).executeTakeFirst())

  it('marks an order paid on a signed event', async () => {
    await fresh()
    expect(await sendEvent(completed(order))).toBe(200)
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'paid', paidMinor: order.totalMinor })
  })

  it('does the work of the same event once, and answers 200 again', async () => {
    await fresh()
    const event = completed(order)
    expect([await sendEvent(event), await sendEvent(event)]).toEqual([200, 200])
    const { payments, history } = await readOrder(customer, order.id)
    expect(payments).toHaveLength(1)
    expect(history.filter(entry => entry.to === 'paid')).toHaveLength(1)
  })

  it('counts a payment once though twenty events of it come at once, half of them the same one', async () => {
    await fresh()
    const event = completed(order)
    const all = Array.from({ length: 20 }, (_, index) => index % 2 ? event : { ...event, id: newEventId() })
    expect(new Set(await Promise.all(all.map(one => sendEvent(one))))).toEqual(new Set([200]))
    const { payments, history, paidMinor } = await readOrder(customer, order.id)
    expect(payments).toHaveLength(1)
    expect(paidMinor).toBe(order.totalMinor)
    expect(history.filter(entry => entry.to === 'paid')).toHaveLength(1)
    const receipts = await eventually(async () => {
      const found = (await mailsTo(customer.person.email)).filter(mail => mail.subject.includes(order.number))
      return found.length ? found : undefined
    }, 'the receipt')
    expect(receipts).toHaveLength(1)
  })

  it('refuses a forged signature, and changes nothing', async () => {
    await fresh()
    const event = completed(order)
    expect(await sendEvent(event, { secret: 'whsec_of_somebody_else' })).toBe(400)
    await unchanged()
    expect(await knows(event.id)).toBe(false)
  })

  it('refuses a body that was changed after it was signed', async () => {
    await fresh()
    expect(await sendEvent(completed(order), { tamper: payload => payload.replace('"eur"', '"usd"') })).toBe(400)
    await unchanged()
  })

  it('refuses a signature that is an hour old: it may be a replay', async () => {
    await fresh()
    expect(await sendEvent(completed(order), { signedAtS: Math.floor(Date.now() / 1000) - 3600 })).toBe(400)
    await unchanged()
  })

  it('refuses an event without a signature', async () => {
    const response = await customer.send('POST', '/api/webhooks/stripe', '{}', { 'content-type': 'application/json' })
    expect(response.status).toBe(400)
  })

  it.each([['a cent short', { amount_total: 1 }], ['in another currency', { currency: 'usd' }]])('does not count a payment %s: it is flagged for the workshop', async (_, change) => {
    await fresh()
    const staff = await signInAs('staff')
    const wrong = 'amount_total' in change ? { amount_total: order.totalMinor - 1 } : change
    expect(await sendEvent(completed(order, wrong))).toBe(200)
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'awaiting-payment', payments: [], attention: null })
    expect((await readOrder(staff, order.id)).attention).toContain('was not counted')
  })

  it('answers 200 to an event that it has no use for', async () => {
    expect(await sendEvent({ id: newEventId(), type: 'customer.created', object: { id: 'cus_1', object: 'customer' } })).toBe(200)
  })

  it('answers 200 to a session of no order of ours, so that the service stops sending it', async () => {
    await fresh()
    expect(await sendEvent(completed(order, { metadata: {}, client_reference_id: null }))).toBe(200)
    expect(await sendEvent(completed(order, { metadata: { orderId: '00000000-0000-4000-8000-000000000000' } }))).toBe(200)
    await unchanged()
  })

  it('stores nothing when the database fails in the middle, and does all of the work when the event comes again', async () => {
    await fresh()
    const event = completed(order)
    await whileInsertsFail('order_history', order.id, async () => {
      expect(await sendEvent(event)).toBe(500)
      await unchanged()
      expect(await knows(event.id)).toBe(false)
    })
    expect(await sendEvent(event)).toBe(200)
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'paid', payments: [{ status: 'succeeded' }] })
  })

  it('cancels an order whose payment page expires, once', async () => {
    await fresh()
    expect(await playPayment(order.sessionId, 'expire')).toMatchObject({ delivered: true })
    const { status, history } = await readOrder(customer, order.id)
    expect(status).toBe('cancelled')
    expect(history.at(-1)).toMatchObject({ to: 'cancelled', by: 'payment service' })
  })

  it('leaves a paid order alone when an expiry comes late', async () => {
    await fresh()
    await sendEvent(completed(order))
    expect(await sendEvent({ id: newEventId(), type: 'checkout.session.expired', object: paidSession(order, { status: 'expired', payment_status: 'unpaid' }) })).toBe(200)
    expect((await readOrder(customer, order.id)).status).toBe('paid')
  })

  it('counts a payment that is paid while its page expires: the order stays cancelled and the money goes back', async () => {
    await fresh()
    await sendEvent({ id: newEventId(), type: 'checkout.session.expired', object: paidSession(order, { status: 'expired', payment_status: 'unpaid' }) })
    // A real payment at the stand-in, so that its refund can be made there.
    expect(await playPayment(order.sessionId, 'pay')).toMatchObject({ delivered: true })
    const seen = await eventually(async () => {
      const now = await readOrder(customer, order.id)
      return now.refunds.some(refund => refund.status === 'succeeded') ? now : undefined
    }, 'the refund')
    expect(seen).toMatchObject({ status: 'cancelled', paidMinor: order.totalMinor, refundedMinor: order.totalMinor, payments: [{ status: 'succeeded' }], refunds: [{ amountMinor: order.totalMinor }] })
  })

  it('gives a second payment of the same order back, and keeps the order paid', async () => {
    await fresh()
    expect(await sendEvent(completed(order, { payment_intent: `pi_first_${order.id}` }))).toBe(200)
    expect(await playPayment(order.sessionId, 'pay')).toMatchObject({ delivered: true })
    const seen = await eventually(async () => {
      const now = await readOrder(customer, order.id)
      return now.refunds.some(refund => refund.status === 'succeeded') ? now : undefined
    }, 'the refund of the second payment')
    expect(seen).toMatchObject({ status: 'paid', paidMinor: 2 * order.totalMinor, refundedMinor: order.totalMinor })
  })

  describe('of a bank that takes its time', () => {
    it('waits while the money is under way, and is paid when it arrives', async () => {
      await fresh()
      expect(await playPayment(order.sessionId, 'pay-later')).toMatchObject({ delivered: true })
      expect(await readOrder(customer, order.id)).toMatchObject({ status: 'awaiting-payment', paidMinor: 0, payments: [{ status: 'pending' }] })
      expect(await playPayment(order.sessionId, 'settle')).toMatchObject({ delivered: true })
      expect(await readOrder(customer, order.id)).toMatchObject({ status: 'paid', payments: [{ status: 'succeeded' }] })
    })

    it('closes the order when the bank refuses', async () => {
      await fresh()
      await playPayment(order.sessionId, 'pay-later')
      expect(await playPayment(order.sessionId, 'fail')).toMatchObject({ delivered: true })
      expect(await readOrder(customer, order.id)).toMatchObject({ status: 'cancelled', paidMinor: 0, payments: [{ status: 'failed' }] })
    })
  })

  it('stops making and shipping while the payment is disputed', async () => {
    await fresh()
    const staff = await signInAs('staff')
    await playPayment(order.sessionId, 'pay')
    expect(await playPayment(order.sessionId, 'dispute')).toMatchObject({ delivered: true })
    const seen = await readOrder(staff, order.id)
    expect(seen.attention).toContain('disputes')
    expect(seen.allowedMoves).toEqual([])
    expect((await staff.post(`/api/orders/${order.id}/status`, { to: 'in-making' })).status).toBe(409)
    expect((await staff.post(`/api/orders/${order.id}/refunds`, { amountMinor: 100, reason: 'To make peace' })).status).toBe(409)
    expect((await readOrder(customer, order.id)).status).toBe('paid')
  })
})
