import Stripe from 'stripe'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { ORDER, sdk, startPayments } from './payment-kit'

// Shapes, codes and words are those of docs.stripe.com/api; the caller is the official SDK, unchanged.
describe('payment stand-in: API', () => {
  let payments: Awaited<ReturnType<typeof startPayments>>
  let stripe: Stripe
  beforeAll(async () => {
    payments = await startPayments()
    stripe = payments.stripe
  })
  afterAll(() => payments.server.stop())

  const refusal = async (call: Promise<unknown>) => {
    const error = await call.then(() => undefined, (thrown: unknown) => thrown)
    expect(error).toBeInstanceOf(Stripe.errors.StripeError)
    return error as InstanceType<typeof Stripe.errors.StripeError>
  }

  it('adds up line items and shipping into the session', async () => {
    const session = await stripe.checkout.sessions.create(ORDER)
    expect(session).toMatchObject({
      object: 'checkout.session', status: 'open', payment_status: 'unpaid', currency: 'eur', livemode: false,
      // 2 × 45.00 + 17.10 = 107.10; with 7.90 shipping 115.00.
      amount_subtotal: 10_710, amount_total: 11_500, total_details: { amount_shipping: 790, amount_tax: 0, amount_discount: 0 },
      client_reference_id: 'order-1', customer_email: 'ann@rimwright.test', metadata: { orderId: 'order-1' }, payment_intent: null,
    })
    expect(session.id).toMatch(/^cs_test_/)
    expect(session.url).toBe(`${payments.server.url}/pay/${session.id}`)
    expect(session.expires_at - session.created).toBe(24 * 3600)
  })

  it('retrieves a session as it was made, with line items when asked to expand them', async () => {
    const made = await stripe.checkout.sessions.create(ORDER)
    const plain = await stripe.checkout.sessions.retrieve(made.id)
    expect(plain.line_items).toBeUndefined()
    expect(plain.amount_total).toBe(11_500)
    const full = await stripe.checkout.sessions.retrieve(made.id, { expand: ['line_items'] })
    expect(full.line_items?.data.map(item => [item.description, item.quantity, item.amount_total])).toEqual([['14 in head, PET 250 µm', 2, 9000], ['VAT 19 %', 1, 1710]])
  })

  it('lists sessions newest first and pages through them', async () => {
    const first = await stripe.checkout.sessions.create(ORDER)
    const second = await stripe.checkout.sessions.create(ORDER)
    const page = await stripe.checkout.sessions.list({ limit: 1 })
    expect(page.data.map(session => session.id)).toEqual([second.id])
    expect(page.has_more).toBe(true)
    const next = await stripe.checkout.sessions.list({ limit: 1, starting_after: second.id })
    expect(next.data.map(session => session.id)).toEqual([first.id])
  })

  it('refuses a wrong key as an authentication error', async () => {
    const error = await refusal(sdk(payments.server, 'sk_test_wrong').checkout.sessions.create(ORDER))
    expect(error).toBeInstanceOf(Stripe.errors.StripeAuthenticationError)
    expect(error.statusCode).toBe(401)
    expect(error.message).not.toContain('sk_test_wrong')
  })

  it('answers an unknown id with 404, resource_missing and the parameter', async () => {
    const error = await refusal(stripe.checkout.sessions.retrieve('cs_test_none'))
    expect(error).toMatchObject({ type: 'StripeInvalidRequestError', statusCode: 404, code: 'resource_missing', param: 'session', message: 'No such checkout.session: \'cs_test_none\'' })
  })

  it('names a missing parameter', async () => {
    const error = await refusal(stripe.checkout.sessions.create({ ...ORDER, line_items: undefined }))
    expect(error).toMatchObject({ statusCode: 400, code: 'parameter_missing', param: 'line_items' })
  })

  it('names an unknown parameter in form notation', async () => {
    const item = { ...ORDER.line_items[0]!, colour: 'red' }
    const error = await refusal(stripe.checkout.sessions.create({ ...ORDER, line_items: [item] }))
    expect(error).toMatchObject({ statusCode: 400, code: 'parameter_unknown', param: 'line_items[0][colour]' })
  })

  it('refuses an amount below the smallest that can be charged', async () => {
    const item = { quantity: 1, price_data: { currency: 'eur', unit_amount: 49, product_data: { name: 'A washer' } } }
    const error = await refusal(stripe.checkout.sessions.create({ ...ORDER, line_items: [item], shipping_options: undefined }))
    expect(error.code).toBe('amount_too_small')
  })

  it('refuses prices in two currencies', async () => {
    const item = { quantity: 1, price_data: { currency: 'usd', unit_amount: 4900, product_data: { name: 'A hoop' } } }
    const error = await refusal(stripe.checkout.sessions.create({ ...ORDER, line_items: [...ORDER.line_items, item] }))
    expect(error.statusCode).toBe(400)
  })

  it.each([['sooner than 30 minutes', 10 * 60], ['later than 24 hours', 25 * 3600]])('refuses an expiry %s from now', async (_, seconds) => {
    const error = await refusal(stripe.checkout.sessions.create({ ...ORDER, expires_at: Math.floor(Date.now() / 1000) + seconds }))
    expect(error.param).toBe('expires_at')
  })

  it('says that it does not have a call instead of pretending', async () => {
    const error = await refusal(stripe.customers.create({ email: 'ann@rimwright.test' }))
    expect(error.statusCode).toBe(404)
  })

  describe('idempotency', () => {
    const create = (idempotencyKey: string, changes: Partial<Stripe.Checkout.SessionCreateParams> = {}) =>
      stripe.checkout.sessions.create({ ...ORDER, ...changes }, { idempotencyKey })

    it('answers the same key and parameters with the first answer and marks it replayed', async () => {
      const first = await create('key-same')
      const again = await create('key-same')
      expect(again.id).toBe(first.id)
      expect(first.lastResponse.headers['idempotent-replayed']).toBeUndefined()
      expect(again.lastResponse.headers['idempotent-replayed']).toBe('true')
      const all = await stripe.checkout.sessions.list({ limit: 100 })
      expect(all.data.filter(session => session.id === first.id)).toHaveLength(1)
    })

    it('refuses the same key with other parameters', async () => {
      await create('key-other')
      const error = await refusal(create('key-other', { client_reference_id: 'order-2' }))
      expect(error).toBeInstanceOf(Stripe.errors.StripeIdempotencyError)
      expect(error.statusCode).toBe(400)
    })

    it('makes one session of twenty simultaneous requests with one key', async () => {
      const sessions = await Promise.all(Array.from({ length: 20 }, () => create('key-many')))
      expect(new Set(sessions.map(session => session.id)).size).toBe(1)
    })

    it('lets a request that was refused for its parameters be corrected under the same key', async () => {
      await refusal(create('key-corrected', { line_items: undefined }))
      const session = await create('key-corrected')
      expect(session.status).toBe('open')
    })
  })
})
