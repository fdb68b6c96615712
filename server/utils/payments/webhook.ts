import type Stripe from 'stripe'
import { getConfig } from '../core/config'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError } from '../core/errors'
import { flagOrder, lockOrder } from '../orders/ledger'
import { bookRefundState } from './refundState'
import { settleFailure, settleSession } from './settle'
import { askPaymentService, useStripe } from './stripe'

/*
 * Security model: nothing in the body is believed before its signature over the raw bytes is checked, with a five-minute
 * window against replays. The event's id is written in the same transaction as its work: a repeat finds the id and does
 * nothing; a failure leaves neither, answers 5xx, and the service sends it again.
 */

/** @throws DomainError bad-signature */
export function verifyStripeEvent(rawBody: Buffer, signature: string | undefined): Stripe.Event {
  try {
    return useStripe().webhooks.constructEvent(rawBody, signature ?? '', getConfig().stripeWebhookSecret)
  } catch {
    throw new DomainError('bad-signature', 'The signature does not fit this message, or the message is too old.')
  }
}

/** Does an event's work once. */
export async function receiveStripeEvent(db: Kysely<DB>, event: Stripe.Event): Promise<{ received: true }> {
  const work = await prepareWork(event)
  await db.transaction().execute(async (trx) => {
    const { numInsertedOrUpdatedRows } = await trx.insertInto('webhook_events').values({ id: event.id, type: event.type })
      .onConflict(conflict => conflict.column('id').doNothing()).executeTakeFirst()
    if (numInsertedOrUpdatedRows) await work(trx)
  })
  return { received: true }
}

type Work = (trx: Transaction<DB>) => Promise<void>

/** What an event asks for. Calls to the service happen here, before the transaction holds any lock. */
async function prepareWork(event: Stripe.Event): Promise<Work> {
  switch (event.type) {
    case 'checkout.session.completed':
    case 'checkout.session.async_payment_succeeded':
    case 'checkout.session.expired': {
      const session = event.data.object
      return trx => settleSession(trx, session)
    }
    case 'checkout.session.async_payment_failed': {
      const session = event.data.object
      return trx => settleFailure(trx, session)
    }
    case 'refund.created':
    case 'refund.updated':
    case 'refund.failed': {
      const refund = event.data.object
      return trx => bookRefundState(trx, refund)
    }
    case 'charge.refunded': {
      const intent = idOf(event.data.object.payment_intent)
      const { data } = intent ? await askPaymentService('list refunds', stripe => stripe.refunds.list({ payment_intent: intent, limit: 100 })) : { data: [] }
      return async (trx) => {
        for (const refund of data) await bookRefundState(trx, refund)
      }
    }
    case 'charge.dispute.created':
    case 'charge.dispute.closed': {
      const dispute = event.data.object
      return trx => noteDispute(trx, dispute)
    }
    default:
      return async () => undefined
  }
}

async function noteDispute(trx: Transaction<DB>, dispute: Stripe.Dispute): Promise<void> {
  const payment = await trx.selectFrom('payments').select('order_id').where('provider_ref', '=', idOf(dispute.payment_intent) ?? '').executeTakeFirst()
  if (!payment) return
  const order = await lockOrder(trx, payment.order_id)
  const over = dispute.status === 'won' || dispute.status === 'warning_closed'
  await trx.updateTable('orders').set({ disputed_at: over ? null : order.disputed_at ?? new Date() }).where('id', '=', order.id).execute()
  await flagOrder(trx, order, over
    ? 'The dispute has ended in the workshop\u2019s favour.'
    : `The customer disputes the payment with the bank (${[dispute.reason, dispute.status].filter(Boolean).join('; ').replaceAll('_', ' ')}). Answer at the payment service; do not make or ship on it.`)
}

function idOf(reference: string | { id: string } | null): string | undefined {
  return typeof reference === 'string' ? reference : reference?.id
}
