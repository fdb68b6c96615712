import type Stripe from 'stripe'
import { invalidRequest, noSuch } from './apiError'
import { newId, type Book, type BookedSession } from './book'
import { addCharge, ensureIntent } from './intents'
import { customerDetails, expireSession } from './sessions'
import type { Webhooks } from './webhooks'

/**
 * What a customer, a bank or time does to a session. Each changes the book, then returns the id of the event that tells
 * of it; the caller saves and sends.
 */
export class Actions {
  constructor(private readonly book: Book, private readonly webhooks: Webhooks, private readonly now: () => number) {}

  /** The card is charged at once. */
  pay(booked: BookedSession): string {
    const intent = this.openIntent(booked)
    addCharge(this.book.content, intent, 'succeeded', booked.session.customer_email, this.nowS())
    Object.assign(intent, { status: 'succeeded', amount_received: intent.amount, last_payment_error: null, next_action: null })
    this.complete(booked, 'paid')
    return this.webhooks.record('checkout.session.completed', booked.session)
  }

  /** The card is refused; the session stays open for another try. */
  decline(booked: BookedSession): string {
    const intent = this.openIntent(booked)
    const charge = addCharge(this.book.content, intent, 'failed', booked.session.customer_email, this.nowS())
    intent.status = 'requires_payment_method'
    intent.last_payment_error = {
      type: 'card_error', code: 'card_declined', decline_code: 'generic_decline', charge: charge.id, message: 'Your card was declined.',
    }
    return this.webhooks.record('payment_intent.payment_failed', intent)
  }

  /** A bank debit or transfer: the session is complete, the money not there yet. */
  payLater(booked: BookedSession): string {
    const intent = this.openIntent(booked)
    intent.status = 'processing'
    this.complete(booked, 'unpaid')
    return this.webhooks.record('checkout.session.completed', booked.session)
  }

  /** The money of payLater arrives, or the bank refuses it. */
  settle(booked: BookedSession, arrived: boolean): string {
    const { session } = booked
    const intent = this.book.content.paymentIntents[String(session.payment_intent)]
    if (session.status !== 'complete' || intent?.status !== 'processing') {
      throw invalidRequest(`Checkout Session ${session.id} has no payment under way.`)
    }
    addCharge(this.book.content, intent, arrived ? 'succeeded' : 'failed', session.customer_email, this.nowS())
    if (arrived) {
      Object.assign(intent, { status: 'succeeded', amount_received: intent.amount })
      session.payment_status = 'paid'
      return this.webhooks.record('checkout.session.async_payment_succeeded', session)
    }
    intent.status = 'requires_payment_method'
    intent.last_payment_error = { type: 'card_error', code: 'payment_intent_payment_attempt_failed', message: 'The payment failed.' }
    return this.webhooks.record('checkout.session.async_payment_failed', session)
  }

  expire(booked: BookedSession): string {
    expireSession(booked)
    return this.webhooks.record('checkout.session.expired', booked.session)
  }

  /** The cardholder disputes the charge with the bank. */
  dispute(booked: BookedSession): string {
    const { charges, disputes, paymentIntents } = this.book.content
    const intent = paymentIntents[String(booked.session.payment_intent)]
    const charge = intent ? charges[String(intent.latest_charge)] : undefined
    if (!charge?.paid) throw invalidRequest(`Checkout Session ${booked.session.id} has no successful charge to dispute.`)
    if (charge.disputed) throw invalidRequest(`Charge ${charge.id} is disputed already.`)
    charge.disputed = true
    const dispute = this.newDispute(charge)
    disputes[dispute.id] = dispute
    return this.webhooks.record('charge.dispute.created', dispute)
  }

  private openIntent(booked: BookedSession): Stripe.PaymentIntent {
    const { session } = booked
    if (session.status !== 'open') throw invalidRequest(`This Checkout Session has a status of ${session.status}; only an open one can be paid.`)
    if (session.expires_at * 1000 <= this.now()) throw invalidRequest('This Checkout Session has passed its expires_at.')
    return ensureIntent(this.book.content, booked, this.nowS())
  }

  private complete({ session }: BookedSession, paymentStatus: 'paid' | 'unpaid'): void {
    Object.assign(session, { status: 'complete', payment_status: paymentStatus, url: null })
    session.customer_details ??= customerDetails(session.customer_email)
  }

  private newDispute(charge: Stripe.Charge): Stripe.Dispute {
    const none = null
    return {
      id: newId('du_'), object: 'dispute', amount: charge.amount, balance_transactions: [], charge: charge.id, created: this.nowS(), currency: charge.currency,
      enhanced_eligibility_types: [], intended_submission_method: null, is_charge_refundable: false, livemode: false, metadata: {},
      payment_intent: charge.payment_intent, reason: 'product_not_received', status: 'needs_response',
      evidence_details: { due_by: this.nowS() + 7 * 86_400, enhanced_eligibility: {}, has_evidence: false, past_due: false, submission_count: 0, submission_method: 'manual' },
      evidence: {
        access_activity_log: none, billing_address: none, cancellation_policy: none, cancellation_policy_disclosure: none, cancellation_rebuttal: none,
        customer_communication: none, customer_email_address: none, customer_name: none, customer_purchase_ip: none, customer_signature: none,
        duplicate_charge_documentation: none, duplicate_charge_explanation: none, duplicate_charge_id: none, enhanced_evidence: {}, product_description: none,
        receipt: none, refund_policy: none, refund_policy_disclosure: none, refund_refusal_explanation: none, service_date: none, service_documentation: none,
        shipping_address: none, shipping_carrier: none, shipping_date: none, shipping_documentation: none, shipping_tracking_number: none,
        uncategorized_file: none, uncategorized_text: none,
      },
    }
  }

  private nowS(): number {
    return Math.floor(this.now() / 1000)
  }
}

export function getIntent(book: Book, id: string): Stripe.PaymentIntent {
  const intent = book.content.paymentIntents[id]
  if (!intent) throw noSuch('payment_intent', id, 'intent')
  return intent
}
