import { beforeAll, describe, expect, it } from 'vitest'
import type { OrderView } from '../../shared/schemas/order'
import { newEventId, openOrder, orderAndPay, readOrder, sendEvent, whileInsertsFail, type Shopper } from '../support/shop'
import { database, eventually, playPayment, signInAs, stack } from '../support/stack'

describe('money of an order', () => {
  let customer: Shopper
  let staff: Shopper
  let owner: Shopper
  beforeAll(async () => {
    [customer, staff, owner] = await Promise.all([signInAs('customer'), signInAs('staff'), signInAs('owner')])
  })
  const refund = (who: Shopper, id: string, amountMinor: number, reason = 'A scratch on the film') => who.post<OrderView & { message: string }>(`/api/orders/${id}/refunds`, { amountMinor, reason })

  it('is settled by the return page too, as the payment service says and not as the address claims', async () => {
    const order = await openOrder(customer)
    expect((await customer.post<OrderView>(`/api/orders/${order.id}/settle`, {})).body.status).toBe('awaiting-payment')
    // The webhook cannot do its work, as if it were lost on the way.
    await whileInsertsFail('payments', order.id, async () => expect(await playPayment(order.sessionId, 'pay')).toMatchObject({ delivered: false }))
    const { body } = await customer.post<OrderView>(`/api/orders/${order.id}/settle`, {})
    expect(body).toMatchObject({ status: 'paid', payments: [{ amountMinor: order.totalMinor, status: 'succeeded' }] })
    expect((await customer.post<OrderView>(`/api/orders/${order.id}/settle`, {})).body.payments).toHaveLength(1)
  })

  it('counts once when webhook and return page come in the same moment', async () => {
    const order = await openOrder(customer)
    await Promise.all([playPayment(order.sessionId, 'pay'), ...Array.from({ length: 5 }, () => customer.post(`/api/orders/${order.id}/settle`, {}))])
    const seen = await eventually(async () => {
      const now = await readOrder(customer, order.id)
      return now.status === 'paid' ? now : undefined
    }, 'the payment')
    expect(seen.payments).toHaveLength(1)
    expect(seen.history.filter(entry => entry.to === 'paid')).toHaveLength(1)
  })

  it('stays unpaid when the card is declined, and can still be paid', async () => {
    const order = await openOrder(customer)
    await playPayment(order.sessionId, 'decline')
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'awaiting-payment', paidMinor: 0 })
    await playPayment(order.sessionId, 'pay')
    expect((await readOrder(customer, order.id)).status).toBe('paid')
  })

  it('goes back in full when a customer cancels before making starts', async () => {
    const order = await orderAndPay(customer)
    const { status, body } = await customer.post<OrderView>(`/api/orders/${order.id}/cancel`)
    expect(status).toBe(200)
    expect(body).toMatchObject({ status: 'cancelled', refundedMinor: order.totalMinor, refunds: [{ amountMinor: order.totalMinor, status: 'succeeded' }] })
    expect(await refundsAtService(order.sessionId)).toEqual([order.totalMinor])
  })

  it('stays when a customer wants to cancel after making has started', async () => {
    const order = await orderAndPay(customer)
    await staff.post(`/api/orders/${order.id}/status`, { to: 'in-making' })
    const { status } = await customer.post(`/api/orders/${order.id}/cancel`)
    expect(status).toBe(409)
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'in-making', refunds: [] })
    expect(await refundsAtService(order.sessionId)).toEqual([])
  })

  it('goes back in parts, each with its reason, and never more than was paid', async () => {
    const order = await orderAndPay(customer)
    await staff.post(`/api/orders/${order.id}/status`, { to: 'in-making' })
    expect((await refund(staff, order.id, 1000)).body).toMatchObject({ status: 'in-making', refundedMinor: 1000, refunds: [{ amountMinor: 1000, reason: 'A scratch on the film', status: 'succeeded' }] })
    const tooMuch = await refund(owner, order.id, order.totalMinor - 999)
    expect(tooMuch.status).toBe(409)
    expect(tooMuch.body.message).toContain(`€${((order.totalMinor - 1000) / 100).toFixed(2)}`)
    expect((await readOrder(customer, order.id)).refundedMinor).toBe(1000)
    expect((await refund(owner, order.id, order.totalMinor - 1000)).body).toMatchObject({ status: 'refunded', refundedMinor: order.totalMinor, mayRefund: false })
    expect((await refund(owner, order.id, 1)).status).toBe(409)
    expect((await refundsAtService(order.sessionId)).sort((a, b) => a - b)).toEqual([1000, order.totalMinor - 1000].sort((a, b) => a - b))
  })

  it('never gives back more than was paid when ten refunds come at once', async () => {
    const order = await orderAndPay(customer)
    const part = Math.floor(order.totalMinor / 4)
    const answers = await Promise.all(Array.from({ length: 10 }, () => refund(staff, order.id, part)))
    expect(answers.filter(answer => answer.status === 201)).toHaveLength(4)
    expect(answers.filter(answer => answer.status === 409)).toHaveLength(6)
    expect((await readOrder(customer, order.id)).refundedMinor).toBe(4 * part)
    expect((await refundsAtService(order.sessionId)).reduce((sum, amount) => sum + amount, 0)).toBe(4 * part)
  })

  it('is given back by the shop and the owner only', async () => {
    const order = await orderAndPay(customer)
    const maker = await signInAs('maker')
    for (const who of [customer, maker]) expect((await refund(who, order.id, 100)).status).toBe(403)
    expect((await readOrder(customer, order.id)).refunds).toEqual([])
  })

  it('asks for a reason', async () => {
    const order = await orderAndPay(customer)
    expect((await refund(staff, order.id, 100, ' ')).status).toBe(400)
    expect((await readOrder(customer, order.id)).refunds).toEqual([])
  })

  it('is flagged when the customer\'s bank sends a refund back, and can be given back again', async () => {
    const order = await orderAndPay(customer)
    await staff.post(`/api/orders/${order.id}/status`, { to: 'in-making' })
    await refund(staff, order.id, 700)
    const { provider_ref: ref } = await database().selectFrom('refunds').select('provider_ref').where('order_id', '=', order.id).executeTakeFirstOrThrow()
    await fetch(`${stack.stripeApiBase}/stand-in/refunds/${ref}/fail`, { method: 'POST' })
    const seen = await eventually(async () => {
      const now = await readOrder(staff, order.id)
      return now.refunds[0]?.status === 'failed' ? now : undefined
    }, 'the failed refund')
    expect(seen.refundedMinor).toBe(0)
    expect(seen.attention).toContain('failed')
    expect((await refund(staff, order.id, order.totalMinor)).status).toBe(201)
  })

  it('knows a refund that was made at the payment service itself', async () => {
    const order = await orderAndPay(customer)
    const { provider_ref: intent } = await database().selectFrom('payments').select('provider_ref').where('order_id', '=', order.id).executeTakeFirstOrThrow()
    const object = { id: `re_test_${order.id}`, object: 'refund', amount: 500, currency: 'eur', payment_intent: intent, status: 'succeeded', metadata: {}, reason: null }
    expect(await sendEvent({ id: newEventId(), type: 'refund.created', object })).toBe(200)
    expect(await sendEvent({ id: newEventId(), type: 'refund.updated', object })).toBe(200)
    expect(await readOrder(customer, order.id)).toMatchObject({ status: 'paid', refundedMinor: 500, refunds: [{ amountMinor: 500, status: 'succeeded' }] })
  })
})

/** Amounts of the refunds that the payment service itself holds for a session's payment. */
async function refundsAtService(sessionId: string): Promise<number[]> {
  const call = async <T>(path: string) => (await fetch(`${stack.stripeApiBase}/v1/${path}`, { headers: { authorization: `Bearer ${stack.stripeSecretKey}` } })).json() as Promise<T>
  const { payment_intent: intent } = await call<{ payment_intent: string }>(`checkout/sessions/${sessionId}`)
  const { data } = await call<{ data: { amount: number, status: string }[] }>(`refunds?payment_intent=${intent}&limit=100`)
  return data.filter(one => one.status === 'succeeded').map(one => one.amount)
}
