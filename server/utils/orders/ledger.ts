import { sql } from 'kysely'
import type { OrderRow, OrderStatus } from '../../../db/orders.table'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { refuseMove } from './machine'
import { orderMachine, type OrderActor, type OrderFacts } from './orderMachine'

/** Who acts, as the history names them. */
export interface Mover { actor: OrderActor, userId: string | null, label: string }

export const byPaymentService: Mover = { actor: 'payment', userId: null, label: 'payment service' }
export const byPerson = (user: SignedInUser): Mover => ({ actor: user.role, userId: user.id, label: user.name })

/** Holds the order for the rest of the transaction: every change of status, payment or refund goes through here first. */
export async function lockOrder(trx: Transaction<DB>, id: string, ownedBy?: string): Promise<OrderRow> {
  const row = await trx.selectFrom('orders').selectAll().where('id', '=', id)
    .$if(ownedBy !== undefined, query => query.where('customer_id', '=', ownedBy!)).forUpdate().executeTakeFirst()
  if (!row) throw notFound('The order')
  return row
}

/** What was paid and given back, by the rows of money: integer minor units of the order's currency. */
export async function readOrderFacts(db: Kysely<DB>, order: Pick<OrderRow, 'id' | 'total_minor' | 'currency' | 'disputed_at'>): Promise<OrderFacts> {
  const { rows: [sums] } = await sql<{ paid: number, refunded: number }>`
    select
      (select coalesce(sum(amount_minor), 0) from payments where order_id = ${order.id} and status = 'succeeded' and currency = ${order.currency}) as paid,
      (select coalesce(sum(amount_minor), 0) from refunds where order_id = ${order.id} and status <> 'failed' and currency = ${order.currency}) as refunded
  `.execute(db)
  return { totalMinor: order.total_minor, paidMinor: Number(sums!.paid), refundedMinor: Number(sums!.refunded), disputed: order.disputed_at !== null }
}

/** Moves a locked order by the table, and writes its history. @throws DomainError move-not-allowed with the reason */
export async function moveOrder(trx: Transaction<DB>, order: OrderRow, to: OrderStatus, mover: Mover, note: string | null = null): Promise<OrderRow> {
  const reason = refuseMove(orderMachine, { from: order.status, to, actor: mover.actor, context: await readOrderFacts(trx, order) })
  if (reason) throw new DomainError('move-not-allowed', reason)
  const moved = await trx.updateTable('orders').set({ status: to, updated_at: new Date() }).where('id', '=', order.id).returningAll().executeTakeFirstOrThrow()
  await writeHistory(trx, order.id, order.status, to, mover, note)
  return moved
}

export async function writeHistory(trx: Transaction<DB>, orderId: string, from: OrderStatus | null, to: OrderStatus, mover: Mover, note: string | null): Promise<void> {
  await trx.insertInto('order_history').values({ order_id: orderId, from_status: from, to_status: to, by_user: mover.userId, by_label: mover.label, note }).execute()
}

/** Asks for a person's eye: nothing is moved, the note stays in the history. Said once, however often it is reported. */
export async function flagOrder(trx: Transaction<DB>, order: OrderRow, note: string): Promise<void> {
  if (order.attention === note) return
  await trx.updateTable('orders').set({ attention: note, updated_at: new Date() }).where('id', '=', order.id).execute()
  await writeHistory(trx, order.id, order.status, order.status, byPaymentService, note)
}
