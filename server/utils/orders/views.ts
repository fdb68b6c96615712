import type { OrderRowView, OrderView, PriceLine, ShippingAddress } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'
import { selectHeadSpecs, toHeadSpecView } from '../designs/specs'
import { dueOnText, isOverdue } from './dates'
import { readOrderFacts } from './ledger'
import { allowedMoves } from './machine'
import { orderMachine } from './orderMachine'

/** Everything of one order. A customer's own only; what is another's is not there. */
export async function getOrder(db: Kysely<DB>, user: SignedInUser, id: string): Promise<OrderView> {
  const order = await db.selectFrom('orders').innerJoin('users', 'users.id', 'orders.customer_id')
    .selectAll('orders').select(['users.name as customer_name', 'users.email as customer_email', dueOnText, isOverdue.as('overdue')])
    .where('orders.id', '=', id).$if(user.role === 'customer', query => query.where('orders.customer_id', '=', user.id)).executeTakeFirst()
  if (!order) throw notFound('The order')
  const [heads, payments, refunds, history, facts] = await Promise.all([
    selectHeadSpecs(db).innerJoin('order_heads', 'order_heads.head_spec_id', 'head_specs.id').where('order_heads.order_id', '=', id).orderBy('order_heads.position').execute(),
    db.selectFrom('payments').selectAll().where('order_id', '=', id).orderBy('created_at').execute(),
    db.selectFrom('refunds').selectAll().where('order_id', '=', id).orderBy('created_at').execute(),
    db.selectFrom('order_history').selectAll().where('order_id', '=', id).orderBy('id').execute(),
    readOrderFacts(db, order),
  ])
  const workshop = user.role !== 'customer'
  return {
    id: order.id, number: order.number, status: order.status, totalMinor: order.total_minor, currency: order.currency, lines: order.lines as PriceLine[],
    shippingAddress: order.shipping_address as ShippingAddress,
    customer: { id: order.customer_id, name: order.customer_name, email: order.customer_email },
    heads: heads.map(toHeadSpecView), createdAt: order.created_at.toISOString(), dueOn: order.due_text, overdue: order.overdue === true,
    attention: workshop ? order.attention : null, paidMinor: facts.paidMinor, refundedMinor: facts.refundedMinor,
    checkoutUrl: order.status === 'awaiting-payment' && user.id === order.customer_id ? order.checkout_url : null,
    payments: payments.map(row => ({ id: row.id, amountMinor: row.amount_minor, currency: row.currency, status: row.status, at: row.created_at.toISOString() })),
    refunds: refunds.map(row => ({ id: row.id, amountMinor: row.amount_minor, currency: row.currency, status: row.status, reason: row.reason, at: row.created_at.toISOString() })),
    // What was flagged for the workshop's eye names sessions and disputes: not for the customer's page.
    history: history.filter(row => workshop || row.from_status !== row.to_status)
      .map(row => ({ at: row.at.toISOString(), from: row.from_status, to: row.to_status, by: row.by_label, note: row.note })),
    allowedMoves: allowedMoves(orderMachine, { from: order.status, actor: user.role, context: facts }),
    mayRefund: mayRefund(user) && facts.paidMinor > facts.refundedMinor,
  }
}

export const mayRefund = (user: SignedInUser) => user.role === 'owner' || user.role === 'staff'

export interface OrderListRow {
  id: string
  number: string
  status: OrderRowView['status']
  total_minor: number
  currency: string
  customer_id: string
  customer_name: string
  created_at: Date
  due_text: string | null
  overdue: boolean | null
  attention: string | null
  heads: string[] | null
}

export function toOrderRowView(row: OrderListRow, user: SignedInUser): OrderRowView {
  return {
    id: row.id, number: row.number, status: row.status, totalMinor: row.total_minor, currency: row.currency,
    customer: { id: row.customer_id, name: row.customer_name }, heads: row.heads ?? [], createdAt: row.created_at.toISOString(),
    dueOn: row.due_text, overdue: row.overdue === true, attention: user.role === 'customer' ? null : row.attention,
  }
}
