import { sql } from 'kysely'
import type { OrderRow } from '../../../db/orders.table'
import type { RefundBody } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import { formatMoney } from '../../../shared/utils/money'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError } from '../core/errors'
import { log } from '../core/log'
import { planRefund } from '../payments/refundPlan'
import { sendRefund } from '../payments/sendRefund'
import { recordAudit } from '../people/audit'
import { byPerson, lockOrder, readOrderFacts, writeHistory } from './ledger'

/** Gives a part or all of what was paid back, bounded under the order's lock by payments less refunds. */
export async function refundOrder(db: Kysely<DB>, user: SignedInUser, orderId: string, body: RefundBody): Promise<void> {
  const ids = await db.transaction().execute(async (trx) => {
    const order = await lockOrder(trx, orderId)
    if (order.disputed_at) throw new DomainError('move-not-allowed', 'The payment is disputed: the bank decides over this money. Answer at the payment service.')
    const { paidMinor, refundedMinor } = await readOrderFacts(trx, order)
    const leftMinor = paidMinor - refundedMinor
    if (leftMinor <= 0) throw new DomainError('conflict', 'Nothing is left to give back on this order.')
    if (body.amountMinor > leftMinor) {
      const message = `At most ${formatMoney(leftMinor, order.currency)} is left to give back.`
      throw new DomainError('conflict', message, [{ path: 'amountMinor', message }])
    }
    await writeHistory(trx, order.id, order.status, order.status, byPerson(user), `Gives back ${formatMoney(body.amountMinor, order.currency)}: ${body.reason}`)
    await recordAudit(trx, { actor: user.id, action: 'order.refund', subjectType: 'order', subjectId: order.id, detail: { amountMinor: body.amountMinor, currency: order.currency } })
    return spreadOverPayments(trx, order, body.amountMinor, body.reason, user.id)
  })
  await sendRefundsNow(ids)
}

/** All that is still paid, in the caller's transaction. Nothing when nothing is. */
export async function planFullRefund(trx: Transaction<DB>, order: OrderRow, user: SignedInUser, reason: string): Promise<string[]> {
  const { paidMinor, refundedMinor } = await readOrderFacts(trx, order)
  return paidMinor > refundedMinor ? spreadOverPayments(trx, order, paidMinor - refundedMinor, reason, user.id) : []
}

/** An order has one payment as a rule; where it has several, each gives back at most what is left of it, oldest first. */
async function spreadOverPayments(trx: Transaction<DB>, order: OrderRow, amountMinor: number, reason: string, byUser: string): Promise<string[]> {
  const { rows } = await sql<{ id: string, left: number }>`
    select payments.id, (payments.amount_minor - coalesce((select sum(amount_minor) from refunds where payment_id = payments.id and status <> 'failed'), 0))::int as left
    from payments where order_id = ${order.id} and status = 'succeeded' and currency = ${order.currency} order by created_at, id`.execute(trx)
  const ids: string[] = []
  let restMinor = amountMinor
  for (const payment of rows) {
    const partMinor = Math.min(restMinor, payment.left)
    if (partMinor <= 0) continue
    ids.push(await planRefund(trx, { order, paymentId: payment.id, amountMinor: partMinor, reason, byUser }))
    restMinor -= partMinor
  }
  if (restMinor > 0) throw new Error(`order ${order.id}: ${restMinor} of a refund found no payment`)
  return ids
}

/** The queue would send them within a second; doing it now lets the page show what became of them. It tries again if this fails. */
export async function sendRefundsNow(ids: string[]): Promise<void> {
  for (const id of ids) await sendRefund(id).catch(error => log.warn({ err: error, refundId: id }, 'a refund waits for the queue'))
}
