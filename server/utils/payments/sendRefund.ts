import Stripe from 'stripe'
import type { DB, Kysely } from '../core/db'
import { useDb } from '../core/db'
import { log } from '../core/log'
import { bookRefundState } from './refundState'
import { useStripe } from './stripe'

/**
 * Asks the payment service for a refund that was written down. Safe to repeat: the row's id is the idempotency key.
 * @throws when the service cannot be reached; the queue tries again
 */
export async function sendRefund(refundId: string, db: Kysely<DB> = useDb()): Promise<void> {
  const refund = await db.selectFrom('refunds').innerJoin('payments', 'payments.id', 'refunds.payment_id')
    .select(['refunds.id', 'refunds.order_id', 'refunds.amount_minor', 'refunds.status', 'refunds.provider_ref', 'payments.provider_ref as payment_ref'])
    .where('refunds.id', '=', refundId).executeTakeFirst()
  if (!refund || refund.provider_ref || refund.status !== 'pending') return
  try {
    const made = await useStripe().refunds.create(
      { payment_intent: refund.payment_ref, amount: refund.amount_minor, reason: 'requested_by_customer', metadata: { refundId: refund.id, orderId: refund.order_id } },
      { idempotencyKey: `refund-${refund.id}` },
    )
    await db.transaction().execute(trx => bookRefundState(trx, made))
  } catch (error) {
    // Refused for good: trying again would be refused again. Anything else is worth another try.
    if (!(error instanceof Stripe.errors.StripeInvalidRequestError)) throw error
    log.error({ refundId, code: error.code, detail: error.message }, 'payment service refused a refund')
    await db.transaction().execute(trx => bookRefundState(trx, { id: `refused-${refund.id}`, status: 'failed', metadata: { refundId: refund.id } }))
  }
}
