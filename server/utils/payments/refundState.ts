import type Stripe from 'stripe'
import type { RefundStatus } from '../../../db/orders.table'
import { formatMoney } from '../../../shared/utils/money'
import type { DB, Transaction } from '../core/db'
import { flagOrder, lockOrder, moveOrder, readOrderFacts, type Mover } from '../orders/ledger'
import { allowedMoves, refuseMove } from '../orders/machine'
import { orderMachine } from '../orders/orderMachine'
import { refundMachine } from './paymentMachines'

type ReportedRefund = Pick<Stripe.Refund, 'id' | 'status' | 'metadata'> & Partial<Pick<Stripe.Refund, 'amount' | 'currency' | 'payment_intent' | 'reason'>>

const STATUS: Record<string, RefundStatus> = { pending: 'pending', requires_action: 'pending', succeeded: 'succeeded', failed: 'failed', canceled: 'failed' }

const byRefund: Mover = { actor: 'refund', userId: null, label: 'payment service' }

/** Brings a refund row in line with what the payment service says of it; writes one down that was made at the service itself. */
export async function bookRefundState(trx: Transaction<DB>, reported: ReportedRefund): Promise<void> {
  const row = await findRefund(trx, reported) ?? await adoptRefund(trx, reported)
  if (!row) return
  const order = await lockOrder(trx, row.order_id)
  const status = STATUS[reported.status ?? 'pending'] ?? 'pending'
  // The row may have moved while this waited for the order's lock.
  const { status: current } = await trx.selectFrom('refunds').select('status').where('id', '=', row.id).executeTakeFirstOrThrow()
  const moves = refuseMove(refundMachine, { from: current, to: status, actor: 'payment', context: null }) === null
  await trx.updateTable('refunds').set({ provider_ref: reported.id, ...(moves && { status }) }).where('id', '=', row.id).execute()
  if (moves && status === 'failed') {
    await flagOrder(trx, order, `A refund of ${formatMoney(row.amount_minor, row.currency)} failed: the money is still with the workshop. Reach the customer and give it back another way.`)
  }
  const facts = await readOrderFacts(trx, order)
  if (allowedMoves(orderMachine, { from: order.status, actor: 'refund', context: facts }).includes('refunded')) await moveOrder(trx, order, 'refunded', byRefund)
}

function findRefund(trx: Transaction<DB>, reported: ReportedRefund) {
  const ownId = reported.metadata?.refundId
  return trx.selectFrom('refunds').select(['id', 'order_id', 'amount_minor', 'currency'])
    .where(({ or, eb }) => or([eb('provider_ref', '=', reported.id), ...(ownId && /^[0-9a-f-]{36}$/.test(ownId) ? [eb('id', '=', ownId)] : [])]))
    .executeTakeFirst()
}

async function adoptRefund(trx: Transaction<DB>, reported: ReportedRefund) {
  const intent = typeof reported.payment_intent === 'string' ? reported.payment_intent : reported.payment_intent?.id
  if (!intent || !reported.amount || !reported.currency) return undefined
  const payment = await trx.selectFrom('payments').select(['id', 'order_id']).where('provider_ref', '=', intent).executeTakeFirst()
  if (!payment) return undefined
  return trx.insertInto('refunds').values({
    order_id: payment.order_id, payment_id: payment.id, provider_ref: reported.id, amount_minor: reported.amount, currency: reported.currency,
    reason: 'Given back at the payment service.', status: 'pending', by_user: null,
  }).onConflict(conflict => conflict.column('provider_ref').doNothing()).returning(['id', 'order_id', 'amount_minor', 'currency']).executeTakeFirst()
}
