import { sql } from 'kysely'
import { useDb } from '../core/db'
import { log } from '../core/log'
import { byPaymentService, lockOrder, moveOrder } from '../orders/ledger'
import { readCheckout } from './checkout'
import { settleSession } from './settle'

/**
 * Unpaid orders whose payment page must have closed by now: asks what became of it, in case the webhook never came.
 * Orders that never got a page are closed. One that fails does not hold up the rest.
 */
export async function settleOverdueCheckouts(): Promise<void> {
  const db = useDb()
  const overdue = await db.selectFrom('orders').select(['id', 'checkout_session_id']).where('status', '=', 'awaiting-payment')
    .where('created_at', '<', sql<Date>`now() - interval '25 hours'`).orderBy('created_at').limit(200).execute()
  for (const order of overdue) {
    try {
      const session = order.checkout_session_id ? await readCheckout(order.checkout_session_id) : undefined
      await db.transaction().execute(async (trx) => {
        if (session) return settleSession(trx, session)
        const locked = await lockOrder(trx, order.id)
        if (locked.status === 'awaiting-payment') await moveOrder(trx, locked, 'cancelled', byPaymentService, 'The payment page never opened.')
      })
    } catch (error) {
      log.warn({ err: error, orderId: order.id }, 'an unpaid order could not be looked up')
    }
  }
}
