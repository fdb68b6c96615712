import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import Stripe from 'stripe'
import { startPaymentServer, type PaymentServer, type PaymentServerOptions } from '../../../local/payments/server'

export const SECRET_KEY = 'sk_test_unit'
export const WEBHOOK_SECRET = 'whsec_unit'

export interface Received {
  body: string
  signature: string
  event: Stripe.Event
}

/** The shop's end of the webhook: answers with the statuses given, one a request, then 200. */
export async function startReceiver(statuses: number[] = []) {
  const received: Received[] = []
  const server = createServer((request, response) => {
    let body = ''
    request.on('data', chunk => body += String(chunk))
    request.on('end', () => {
      received.push({ body, signature: String(request.headers['stripe-signature']), event: JSON.parse(body) as Stripe.Event })
      response.writeHead(statuses.shift() ?? 200).end()
    })
  })
  await new Promise<void>(resolve => server.listen(0, '127.0.0.1', resolve))
  const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}/webhook`
  const stop = () => new Promise<void>((resolve) => {
    server.close(() => resolve())
    server.closeAllConnections()
  })
  return { url, received, stop }
}

/** The stand-in with the unchanged SDK pointed at it. */
export async function startPayments(options: Partial<PaymentServerOptions> = {}) {
  const server = await startPaymentServer({ secretKey: SECRET_KEY, webhookSecret: WEBHOOK_SECRET, ...options })
  return { server, stripe: sdk(server), script: scripted(server) }
}

export function sdk(server: PaymentServer, key = SECRET_KEY): Stripe {
  return new Stripe(key, { host: '127.0.0.1', port: server.port, protocol: 'http', maxNetworkRetries: 0, telemetry: false })
}

function scripted(server: PaymentServer) {
  return async (path: string) => {
    const response = await fetch(`${server.url}/stand-in/${path}`, { method: 'POST' })
    return { status: response.status, body: await response.json() as { session: Stripe.Checkout.Session, delivered: boolean, error?: { message: string } } }
  }
}

export const ORDER = {
  mode: 'payment',
  success_url: 'http://127.0.0.1:3000/orders/1?session={CHECKOUT_SESSION_ID}',
  cancel_url: 'http://127.0.0.1:3000/orders/1',
  client_reference_id: 'order-1',
  customer_email: 'ann@rimwright.test',
  metadata: { orderId: 'order-1' },
  line_items: [
    { quantity: 2, price_data: { currency: 'eur', unit_amount: 4500, product_data: { name: '14 in head, PET 250 µm' } } },
    { quantity: 1, price_data: { currency: 'eur', unit_amount: 1710, product_data: { name: 'VAT 19 %' } } },
  ],
  shipping_options: [{ shipping_rate_data: { type: 'fixed_amount', display_name: 'Parcel', fixed_amount: { amount: 790, currency: 'eur' } } }],
} satisfies Stripe.Checkout.SessionCreateParams

/** Waits for a condition that another process brings about. */
export async function until(holds: () => boolean, limitMs = 5000): Promise<void> {
  const end = Date.now() + limitMs
  while (!holds()) {
    if (Date.now() > end) throw new Error(`Not within ${limitMs} ms: ${holds.toString()}`)
    await new Promise(resolve => setTimeout(resolve, 10))
  }
}
