import Stripe from 'stripe'
import { expect, it } from 'vitest'
import { playPayment, stack } from '../support/stack'

function sdk(): Stripe {
  return new Stripe(stack.stripeSecretKey, { host: '127.0.0.1', port: Number(new URL(stack.stripeApiBase).port), protocol: 'http', maxNetworkRetries: 0, telemetry: false })
}

function createSession() {
  return sdk().checkout.sessions.create({
    mode: 'payment',
    success_url: `${stack.baseUrl}/`,
    client_reference_id: 'of-no-order',
    line_items: [{ quantity: 1, price_data: { currency: 'eur', unit_amount: 5000, product_data: { name: 'A head that nobody ordered' } } }],
  })
}

it('reaches the app with a webhook whose signature the app accepts', async () => {
  const { id } = await createSession()
  // A payment for an unknown order is no reason to have the service send it again: the app answers 2xx and logs it.
  expect(await playPayment(id, 'pay')).toEqual({ status: 200, delivered: true })
})

it('sends an event again on demand, and the app takes the repeat', async () => {
  const { id } = await createSession()
  await playPayment(id, 'expire')
  const [event] = (await sdk().events.list({ type: 'checkout.session.expired', limit: 1 })).data
  const response = await fetch(`${stack.stripeApiBase}/stand-in/events/${event!.id}/resend`, { method: 'POST' })
  expect(await response.json()).toMatchObject({ delivered: true })
})
