import type { OrderRow } from '../../../db/orders.table'
import type { DB, Transaction } from '../core/db'
import { enqueue } from '../core/jobs'

export interface RefundPlan { order: OrderRow, paymentId: string, amountMinor: number, reason: string, byUser: string | null }

/**
 * Writes a refund down and queues the call that makes it, in the caller's transaction: it leaves after commit, once, and is
 * tried again until the payment service has answered. The caller holds the order's lock and has checked the bound.
 */
export async function planRefund(trx: Transaction<DB>, plan: RefundPlan): Promise<string> {
  const { id } = await trx.insertInto('refunds').values({
    order_id: plan.order.id, payment_id: plan.paymentId, provider_ref: null, amount_minor: plan.amountMinor, currency: plan.order.currency,
    reason: plan.reason, status: 'pending', by_user: plan.byUser,
  }).returning('id').executeTakeFirstOrThrow()
  await enqueue(trx, 'refund', { id })
  return id
}
