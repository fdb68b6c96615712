import type { SignedInUser } from '../../../shared/types/roles'
import type { OrderRow } from '../../../db/orders.table'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { closeCheckout } from '../payments/checkout'
import { settleSession } from '../payments/settle'
import { byPerson, lockOrder, moveOrder } from './ledger'
import { refuseMove } from './machine'
import { orderMachine } from './orderMachine'
import { planFullRefund, sendRefundsNow } from './refunds'

/**
 * Cancels while that is free: before payment, or after it and before making starts, then with all of the money back.
 * The payment page is closed first, so that it cannot be paid a moment later.
 */
export async function cancelOrder(db: Kysely<DB>, user: SignedInUser, id: string, note: string | null): Promise<void> {
  const seen = await findOrder(db, user, id)
  const closesPage = seen.status === 'awaiting-payment' && seen.checkout_session_id !== null
  if (closesPage) {
    requireCancellable(seen, user)
    const session = await closeCheckout(seen.checkout_session_id!)
    // Paid in this very moment: that comes first. The person asked to cancel an unpaid order, so they are asked again.
    if (session.payment_status === 'paid') {
      await db.transaction().execute(trx => settleSession(trx, session))
      throw new DomainError('move-not-allowed', 'The payment has just arrived. Cancel again, and it goes back to you.')
    }
  }
  const refundIds = await db.transaction().execute(trx => cancelLocked(trx, user, id, note, closesPage))
  await sendRefundsNow(refundIds)
}

async function cancelLocked(trx: Transaction<DB>, user: SignedInUser, id: string, note: string | null, closedHere: boolean): Promise<string[]> {
  const order = await lockOrder(trx, id)
  // Closing the page makes the payment service say so; its word may have cancelled the order before us.
  if (order.status === 'cancelled' && closedHere) return []
  await moveOrder(trx, order, 'cancelled', byPerson(user), note)
  await trx.updateTable('orders').set({ checkout_url: null }).where('id', '=', id).execute()
  return planFullRefund(trx, order, user, 'The order was cancelled before making started.')
}

function requireCancellable(order: OrderRow, user: SignedInUser): void {
  const reason = refuseMove(orderMachine, { from: order.status, to: 'cancelled', actor: user.role, context: { totalMinor: order.total_minor, paidMinor: 0, refundedMinor: 0, disputed: false } })
  if (reason) throw new DomainError('move-not-allowed', reason)
}

/** The order as it stands, for the person who asks: a customer's own only. */
export async function findOrder(db: Kysely<DB>, user: SignedInUser, id: string): Promise<OrderRow> {
  const order = await db.selectFrom('orders').selectAll().where('id', '=', id)
    .$if(user.role === 'customer', query => query.where('customer_id', '=', user.id)).executeTakeFirst()
  if (!order) throw notFound('The order')
  return order
}
