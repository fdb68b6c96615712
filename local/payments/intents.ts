import type Stripe from 'stripe'
import { newId, type BookContent, type BookedSession } from './book'

/** The payment intent of a session: made when the customer first tries to pay, as the API does. */
export function ensureIntent(book: BookContent, booked: BookedSession, nowS: number): Stripe.PaymentIntent {
  const { session, intentData } = booked
  const present = typeof session.payment_intent === 'string' ? book.paymentIntents[session.payment_intent] : undefined
  if (present) return present
  const id = newId('pi_')
  const amount = session.amount_total ?? 0
  const intent: Stripe.PaymentIntent = {
    id, object: 'payment_intent', allowed_payment_method_types: null, amount, amount_capturable: 0, amount_received: 0, application: null,
    application_fee_amount: null, automatic_payment_methods: null, canceled_at: null, cancellation_reason: null, capture_method: 'automatic_async',
    client_secret: `${id}_secret_${newId('')}`, confirmation_method: 'automatic', created: nowS, currency: session.currency ?? '', customer: null,
    customer_account: null, description: intentData.description ?? null, excluded_payment_method_types: null, last_payment_error: null, latest_charge: null,
    livemode: false, managed_payments: null, metadata: intentData.metadata ?? {}, next_action: null, on_behalf_of: null, payment_method: null,
    payment_method_configuration_details: null, payment_method_options: {}, payment_method_types: session.payment_method_types, payment_record: null,
    processing: null, receipt_email: intentData.receipt_email ?? null, review: null, setup_future_usage: null, shipping: null, source: null,
    statement_descriptor: null, statement_descriptor_suffix: null, status: 'requires_payment_method', transfer_group: null,
  }
  book.paymentIntents[id] = intent
  session.payment_intent = id
  return intent
}

/** A charge for the whole of the intent, settled as told. */
export function addCharge(book: BookContent, intent: Stripe.PaymentIntent, settled: 'succeeded' | 'failed', email: string | null, nowS: number): Stripe.Charge {
  const paid = settled === 'succeeded'
  const charge: Stripe.Charge = {
    id: newId('ch_'), object: 'charge', amount: intent.amount, amount_captured: paid ? intent.amount : 0, amount_refunded: 0, application: null,
    application_fee: null, application_fee_amount: null, balance_transaction: paid ? newId('txn_') : null,
    billing_details: { address: null, email, name: null, phone: null, tax_id: null }, calculated_statement_descriptor: null, captured: paid, created: nowS,
    currency: intent.currency, customer: null, description: intent.description, disputed: false, failure_balance_transaction: null,
    failure_code: paid ? null : 'card_declined', failure_message: paid ? null : 'Your card was declined.', fraud_details: {}, livemode: false,
    metadata: intent.metadata, on_behalf_of: null, outcome: null, paid, payment_intent: intent.id, payment_method: newId('pm_'),
    payment_method_details: { type: 'card' }, receipt_email: intent.receipt_email, receipt_number: null, receipt_url: null, refunded: false, review: null,
    shipping: null, source: null, source_transfer: null, statement_descriptor: null, statement_descriptor_suffix: null, status: settled,
    transfer_data: null, transfer_group: null,
  }
  book.charges[charge.id] = charge
  intent.latest_charge = charge.id
  return charge
}
