import type { OrderBody, PriceLine } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import { formatMoney } from '../../../shared/utils/money'
import type { OrderRow } from '../../../db/orders.table'
import { DomainError, notFound } from '../core/errors'
import type { DB, Kysely, Transaction } from '../core/db'
import { quoteEnd } from '../designs/specs'
import { openCheckout, type CheckoutOrder } from '../payments/checkout'
import { addUp } from '../prices/calculate'
import { getPriceListById } from '../prices/priceLists'
import { byPaymentService, byPerson, lockOrder, moveOrder, writeHistory } from './ledger'

export interface CreatedOrder {
  order: { id: string, number: string, status: OrderRow['status'], totalMinor: number, currency: string }
  checkoutUrl: string
}

/** Writes the order, then opens its payment page. Without the page there is nothing to pay, so the order closes again. */
export async function createOrder(db: Kysely<DB>, user: SignedInUser, body: OrderBody): Promise<CreatedOrder> {
  const order = await db.transaction().execute(trx => insertOrder(trx, user, body))
  try {
    const checkoutUrl = await openCheckout(db, toCheckoutOrder(order, user))
    return { order: { id: order.id, number: order.number, status: order.status, totalMinor: order.total_minor, currency: order.currency }, checkoutUrl }
  } catch (error) {
    await db.transaction().execute(async (trx) => {
      const locked = await lockOrder(trx, order.id)
      if (locked.status === 'awaiting-payment') await moveOrder(trx, locked, 'cancelled', byPaymentService, 'The payment page could not be opened.')
    })
    throw error
  }
}

function toCheckoutOrder(order: OrderRow, user: SignedInUser): CheckoutOrder {
  return { id: order.id, number: order.number, currency: order.currency, lines: order.lines as PriceLine[], createdAt: order.created_at, customerEmail: user.email }
}

async function insertOrder(trx: Transaction<DB>, user: SignedInUser, body: OrderBody): Promise<OrderRow> {
  const specs = await lockSpecs(trx, user, body.headSpecIds)
  const newest = specs.reduce((latest, spec) => spec.created_at > latest.created_at ? spec : latest)
  const list = await getPriceListById(trx, newest.price_list_id)
  const heads = specs.map(spec => (spec.price as { lines: PriceLine[] }).lines.filter(line => line.kind !== 'shipping' && line.kind !== 'vat'))
  const { totalMinor, lines } = addUp(list.prices, list.currency, heads, body.shippingAddress.country)
  if (totalMinor > MAX_CHARGE_MINOR) throw new DomainError('conflict', `An order of ${formatMoney(totalMinor, list.currency)} is more than can be paid at once. Order fewer heads.`)
  const order = await trx.insertInto('orders').values({
    customer_id: user.id, status: 'awaiting-payment', currency: list.currency, total_minor: totalMinor,
    shipping_address: JSON.stringify(body.shippingAddress), lines: JSON.stringify(lines),
  }).returningAll().executeTakeFirstOrThrow()
  await trx.insertInto('order_heads').values(specs.map((spec, position) => ({ order_id: order.id, head_spec_id: spec.id, position }))).execute()
  await writeHistory(trx, order.id, null, 'awaiting-payment', byPerson(user), null)
  return order
}

/** Largest charge of the payment service: eight digits (docs.stripe.com/currencies#minimum-and-maximum-charge-amounts). */
const MAX_CHARGE_MINOR = 99_999_999

/**
 * The heads, in the order asked for, held until the order stands: own, reachable, within the price's days, and in no other
 * order that is still under way.
 */
async function lockSpecs(trx: Transaction<DB>, user: SignedInUser, ids: string[]) {
  const rows = await trx.selectFrom('head_specs').innerJoin('price_lists', 'price_lists.id', 'head_specs.price_list_id')
    .selectAll('head_specs').select('price_lists.prices')
    .where('head_specs.id', 'in', ids).where('head_specs.customer_id', '=', user.id)
    .orderBy('head_specs.id').forUpdate('head_specs').execute()
  const specs = ids.map((id) => {
    const spec = rows.find(row => row.id === id)
    if (!spec) throw notFound('The head')
    return spec
  })
  for (const spec of specs) {
    if (!spec.reachable) throw new DomainError('conflict', `This head cannot be made as designed. ${spec.message}`)
    if (quoteEnd(spec) < new Date()) throw new DomainError('conflict', 'The price of this head has lapsed. Open the design again for a new one.')
  }
  const elsewhere = await trx.selectFrom('order_heads').innerJoin('orders', 'orders.id', 'order_heads.order_id').select('orders.number')
    .where('order_heads.head_spec_id', 'in', ids).where('orders.status', 'in', ['awaiting-payment', 'paid', 'in-making', 'tuned']).executeTakeFirst()
  if (elsewhere) throw new DomainError('conflict', `This head stands in order ${elsewhere.number} already. Pay that one, or cancel it first.`)
  return specs
}
