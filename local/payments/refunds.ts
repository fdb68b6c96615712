import type Stripe from 'stripe'
import { invalidRequest, noSuch } from './apiError'
import { newId, type BookContent } from './book'
import type { CreateRefundInput } from './sessionInput'

/**
 * Refunds a charge, whole or in part, by docs.stripe.com/api/refunds/create: never more than is left of it.
 * @returns the refund and its charge, both booked
 */
export function createRefund(book: BookContent, input: CreateRefundInput, nowS: number): { refund: Stripe.Refund, charge: Stripe.Charge } {
  const charge = findCharge(book, input)
  const left = charge.amount_captured - charge.amount_refunded
  if (charge.disputed) throw invalidRequest(`Charge ${charge.id} has been charged back; cannot issue a refund.`, { code: 'charge_disputed' })
  if (left === 0) throw invalidRequest(`Charge ${charge.id} has already been refunded.`, { code: 'charge_already_refunded' })
  const amount = input.amount ?? left
  if (amount < 1) throw invalidRequest('Invalid positive integer', { code: 'parameter_invalid_integer', param: 'amount' })
  if (amount > left) {
    throw invalidRequest(`Refund amount (${amount}) is greater than unrefunded amount on charge (${left})`, { param: 'amount' })
  }
  const refund: Stripe.Refund = {
    id: newId('re_'), object: 'refund', amount, balance_transaction: newId('txn_'), charge: charge.id, created: nowS, currency: charge.currency,
    customer: null, customer_account: null, metadata: input.metadata ?? {}, payment_intent: charge.payment_intent, payment_method: charge.payment_method,
    reason: input.reason ?? null, receipt_number: null, source_transfer_reversal: null, status: 'succeeded', transfer_reversal: null,
  }
  book.refunds[refund.id] = refund
  charge.amount_refunded += amount
  charge.refunded = charge.amount_refunded === charge.amount_captured
  return { refund, charge }
}

/** A refund that the customer's bank sent back: the money is the merchant's again. */
export function failRefund(book: BookContent, id: string): Stripe.Refund {
  const refund = getRefund(book, id)
  if (refund.status === 'failed') throw invalidRequest(`Refund ${id} has failed already.`)
  refund.status = 'failed'
  refund.failure_reason = 'lost_or_stolen_card'
  const charge = typeof refund.charge === 'string' ? book.charges[refund.charge] : undefined
  if (charge) {
    charge.amount_refunded -= refund.amount
    charge.refunded = false
  }
  return refund
}

export function getRefund(book: BookContent, id: string): Stripe.Refund {
  const refund = book.refunds[id]
  if (!refund) throw noSuch('refund', id, 'id')
  return refund
}

function findCharge(book: BookContent, input: CreateRefundInput): Stripe.Charge {
  if (input.charge) {
    const charge = book.charges[input.charge]
    if (!charge) throw noSuch('charge', input.charge, 'charge')
    return charge
  }
  if (!input.payment_intent) throw invalidRequest('One of the following params should be provided for this request: payment_intent or charge.')
  const intent = book.paymentIntents[input.payment_intent]
  if (!intent) throw noSuch('payment_intent', input.payment_intent, 'payment_intent')
  const charge = typeof intent.latest_charge === 'string' ? book.charges[intent.latest_charge] : undefined
  if (!charge?.paid) throw invalidRequest(`This PaymentIntent (${intent.id}) does not have a successful charge to refund.`)
  return charge
}
