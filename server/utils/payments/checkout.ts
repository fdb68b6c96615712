import Stripe from 'stripe'
import type { PriceLine } from '../../../shared/schemas/order'
import { getConfig } from '../core/config'
import type { DB, Kysely } from '../core/db'
import { askPaymentService, useStripe } from './stripe'

/** Longest life that the payment service gives a checkout session (docs.stripe.com/api/checkout/sessions/create). */
const CHECKOUT_LIFE_S = 24 * 3600

export interface CheckoutOrder { id: string, number: string, currency: string, lines: PriceLine[], createdAt: Date, customerEmail: string }

/**
 * Opens the hosted payment page of an order and remembers it. Safe to repeat: the idempotency key and the parameters
 * follow from the order alone, so a second call finds the first one's session.
 */
export async function openCheckout(db: Kysely<DB>, order: CheckoutOrder): Promise<string> {
  const { publicUrl } = getConfig()
  const session = await askPaymentService('open checkout', stripe => stripe.checkout.sessions.create({
    mode: 'payment',
    line_items: order.lines.filter(line => line.amountMinor > 0).map(line => ({
      quantity: 1,
      price_data: { currency: order.currency, unit_amount: line.amountMinor, product_data: { name: line.label } },
    })),
    customer_email: order.customerEmail,
    client_reference_id: order.id,
    metadata: { orderId: order.id, orderNumber: order.number },
    payment_intent_data: { description: `Order ${order.number}`, metadata: { orderId: order.id } },
    expires_at: Math.floor(order.createdAt.getTime() / 1000) + CHECKOUT_LIFE_S,
    success_url: `${publicUrl}/orders/${order.id}?session_id={CHECKOUT_SESSION_ID}`,
    cancel_url: `${publicUrl}/orders/${order.id}`,
  }, { idempotencyKey: `order-${order.id}-checkout` }))
  if (!session.url) throw new Error(`checkout session ${session.id} of order ${order.id} has no address`)
  await db.updateTable('orders').set({ checkout_session_id: session.id, checkout_url: session.url })
    .where('id', '=', order.id).execute()
  return session.url
}

/**
 * Closes the payment page, so that a cancelled order cannot be paid a moment later.
 * @returns the session as it stands now: it may have been paid in the same moment
 */
export async function closeCheckout(sessionId: string): Promise<Stripe.Checkout.Session> {
  try {
    return await useStripe().checkout.sessions.expire(sessionId)
  } catch (error) {
    // "Only Checkout Sessions with a status in [open] can be expired": look what became of it.
    if (!(error instanceof Stripe.errors.StripeInvalidRequestError)) return askPaymentService('close checkout', () => Promise.reject(error))
    return readCheckout(sessionId)
  }
}

export function readCheckout(sessionId: string): Promise<Stripe.Checkout.Session> {
  return askPaymentService('read checkout', stripe => stripe.checkout.sessions.retrieve(sessionId))
}
