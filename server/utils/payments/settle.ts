import { sql } from 'kysely'
import type Stripe from 'stripe'
import type { OrderRow, PaymentStatus } from '../../../db/orders.table'
import { formatMoney } from '../../../shared/utils/money'
import { byPaymentService, flagOrder, lockOrder, moveOrder, readOrderFacts, writeHistory } from '../orders/ledger'
import { refuseMove } from '../orders/machine'
import type { DB, Transaction } from '../core/db'
import { DomainError } from '../core/errors'
import { enqueue } from '../core/jobs'
import { log } from '../core/log'
import { getPriceListById } from '../prices/priceLists'
import { paymentMachine } from './paymentMachines'
import { planRefund } from './refundPlan'

/**
 * Brings an order in line with its checkout session. The webhook and the return page both come here; doing it again
 * changes nothing. Money that arrives is never dropped: what does not fit its order is recorded and given back, or flagged.
 */
export async function settleSession(trx: Transaction<DB>, session: Stripe.Checkout.Session): Promise<void> {
  const order = await findOrderOf(trx, session)
  if (!order) return
  if (session.status === 'expired') return closeUnpaid(trx, order, 'The payment page closed unpaid.')
  if (session.status !== 'complete') return
  const amountMinor = session.amount_total ?? 0
  const currency = session.currency ?? ''
  const providerRef = paymentRef(session)
  if (await trx.selectFrom('payments').select('id').where('provider_ref', '=', providerRef).where('status', '=', 'succeeded').executeTakeFirst()) return
  if (amountMinor !== order.total_minor || currency !== order.currency) return flagMismatch(trx, order, session)
  if (session.payment_status === 'unpaid') return noteUnderWay(trx, order, providerRef)
  await bookPayment(trx, order, providerRef, 'succeeded')
  if (order.status === 'awaiting-payment') return markPaid(trx, order)
  await giveBackStray(trx, order, providerRef)
}

/** A bank refused a payment that was under way: the session cannot be used again, so the order closes. */
export async function settleFailure(trx: Transaction<DB>, session: Stripe.Checkout.Session): Promise<void> {
  const order = await findOrderOf(trx, session)
  if (!order) return
  await bookPayment(trx, order, paymentRef(session), 'failed')
  await closeUnpaid(trx, order, 'The bank refused the payment.')
}

async function findOrderOf(trx: Transaction<DB>, session: Stripe.Checkout.Session): Promise<OrderRow | null> {
  const orderId = session.metadata?.orderId ?? session.client_reference_id
  try {
    if (orderId && /^[0-9a-f-]{36}$/.test(orderId)) return await lockOrder(trx, orderId)
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
  }
  log.warn({ sessionId: session.id }, 'a checkout session of no order of ours')
  return null
}

/** The payment intent names the money; a session without one (it is made with the first try) names itself. */
function paymentRef(session: Stripe.Checkout.Session): string {
  const intent = session.payment_intent
  return typeof intent === 'string' ? intent : intent?.id ?? session.id
}

/** One row a payment. A row moves only as the payment table says; late or repeated words change nothing. */
async function bookPayment(trx: Transaction<DB>, order: OrderRow, providerRef: string, status: PaymentStatus): Promise<void> {
  const known = await trx.selectFrom('payments').select(['id', 'status']).where('provider_ref', '=', providerRef).forUpdate().executeTakeFirst()
  if (known) {
    if (refuseMove(paymentMachine, { from: known.status, to: status, actor: 'payment', context: null }) !== null) return
    await trx.updateTable('payments').set({ status }).where('id', '=', known.id).execute()
    return
  }
  await trx.insertInto('payments').values({ order_id: order.id, provider_ref: providerRef, amount_minor: order.total_minor, currency: order.currency, status }).execute()
}

async function noteUnderWay(trx: Transaction<DB>, order: OrderRow, providerRef: string): Promise<void> {
  if (await trx.selectFrom('payments').select('id').where('provider_ref', '=', providerRef).executeTakeFirst()) return
  await bookPayment(trx, order, providerRef, 'pending')
  await writeHistory(trx, order.id, order.status, order.status, byPaymentService, 'The payment is under way; the bank has not confirmed it yet.')
}

async function markPaid(trx: Transaction<DB>, order: OrderRow): Promise<void> {
  await moveOrder(trx, order, 'paid', byPaymentService)
  const { price_list_id: listId } = await trx.selectFrom('order_heads').innerJoin('head_specs', 'head_specs.id', 'order_heads.head_spec_id')
    .select('head_specs.price_list_id').where('order_heads.order_id', '=', order.id).executeTakeFirstOrThrow()
  const { prices } = await getPriceListById(trx, listId)
  await trx.updateTable('orders').set({ due_on: sql`current_date + ${prices.makingDays}::int`, checkout_url: null }).where('id', '=', order.id).execute()
  await enqueue(trx, 'mail', { kind: 'order-receipt', id: order.id })
}

async function closeUnpaid(trx: Transaction<DB>, order: OrderRow, note: string): Promise<void> {
  if (order.status !== 'awaiting-payment') return
  await moveOrder(trx, order, 'cancelled', byPaymentService, note)
  await trx.updateTable('orders').set({ checkout_url: null }).where('id', '=', order.id).execute()
}

/** Money for an order that no longer waits for it: cancelled meanwhile, or paid twice. It goes back by itself. */
async function giveBackStray(trx: Transaction<DB>, order: OrderRow, providerRef: string): Promise<void> {
  const reason = order.status === 'cancelled' ? 'The payment arrived after the order was cancelled.' : 'The order had been paid before.'
  const { id } = await trx.selectFrom('payments').select('id').where('provider_ref', '=', providerRef).executeTakeFirstOrThrow()
  const { paidMinor, refundedMinor } = await readOrderFacts(trx, order)
  const amountMinor = Math.min(order.total_minor, paidMinor - refundedMinor)
  if (amountMinor > 0) await planRefund(trx, { order, paymentId: id, amountMinor, reason, byUser: null })
  await writeHistory(trx, order.id, order.status, order.status, byPaymentService, `${reason} It goes back to the customer.`)
}

async function flagMismatch(trx: Transaction<DB>, order: OrderRow, session: Stripe.Checkout.Session): Promise<void> {
  const got = session.currency && session.amount_total !== null ? formatMoney(session.amount_total, session.currency) : 'no amount'
  const note = `The payment service reports ${got} for session ${session.id}; the order is ${formatMoney(order.total_minor, order.currency)}. It was not counted: look it up at the payment service.`
  log.error({ orderId: order.id, sessionId: session.id }, 'amount or currency of a payment differs from its order')
  await flagOrder(trx, order, note)
}
