import type { OrderStatus } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { readCheckout } from '../payments/checkout'
import { settleSession } from '../payments/settle'
import { recordAudit } from '../people/audit'
import { cancelOrder, findOrder } from './cancel'
import { byPerson, lockOrder, moveOrder } from './ledger'

/** The bench or the shop moves an order on. @throws DomainError move-not-allowed with the reason */
export async function changeOrderStatus(db: Kysely<DB>, user: SignedInUser, id: string, to: OrderStatus, note: string | null): Promise<void> {
  if (to === 'cancelled') return cancelOrder(db, user, id, note)
  await db.transaction().execute(async (trx) => {
    const order = await lockOrder(trx, id)
    // Until heads are proved in this house, the history says that the bench's word stands for the proof.
    const words = to === 'tuned' ? [note, 'Without a proof reading.'].filter(Boolean).join(' ') : note
    await moveOrder(trx, order, to, byPerson(user), words || null)
    await recordAudit(trx, { actor: user.id, action: 'order.move', subjectType: 'order', subjectId: id, detail: { from: order.status, to } })
  })
}

/** The return page's word is not trusted: the payment service is asked, then the webhook's own function does the rest. */
export async function settleOrder(db: Kysely<DB>, user: SignedInUser, id: string): Promise<void> {
  const order = await findOrder(db, user, id)
  if (order.status !== 'awaiting-payment' || !order.checkout_session_id) return
  const session = await readCheckout(order.checkout_session_id)
  await db.transaction().execute(trx => settleSession(trx, session))
}

/** A person has looked at what was flagged. The note stays in the history. */
export async function clearAttention(db: Kysely<DB>, user: SignedInUser, id: string): Promise<void> {
  await db.transaction().execute(async (trx) => {
    const order = await lockOrder(trx, id)
    if (!order.attention) return
    await trx.updateTable('orders').set({ attention: null, updated_at: new Date() }).where('id', '=', id).execute()
    await recordAudit(trx, { actor: user.id, action: 'order.attention-cleared', subjectType: 'order', subjectId: id, detail: { note: order.attention } })
  })
}
