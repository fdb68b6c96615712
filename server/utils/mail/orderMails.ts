import { getConfig } from '../core/config'
import type { DB, Kysely } from '../core/db'
import type { PriceLine } from '../../../shared/schemas/order'
import { formatMoney } from '../../../shared/utils/money'
import type { MailContent } from './layout'

/** The receipt of a paid order, line by line. */
export async function orderReceipt(db: Kysely<DB>, orderId: string): Promise<MailContent | null> {
  const order = await db.selectFrom('orders').innerJoin('users', 'users.id', 'orders.customer_id')
    .select(['orders.id', 'orders.number', 'orders.currency', 'orders.total_minor', 'orders.lines', 'users.name', 'users.email'])
    .where('orders.id', '=', orderId).executeTakeFirst()
  if (!order) return null
  const money = (minor: number) => formatMoney(minor, order.currency)
  return {
    to: order.email, subject: `Receipt for order ${order.number}`, greeting: `Dear ${order.name},`,
    paragraphs: [`Thank you. Order ${order.number} is paid, and goes to the bench next.`],
    rows: [...(order.lines as PriceLine[]).map(line => ({ label: line.label, value: money(line.amountMinor) })), { label: 'Paid in all', value: money(order.total_minor) }],
    action: { label: 'Follow the order', url: `${getConfig().publicUrl}/orders/${order.id}` },
  }
}
