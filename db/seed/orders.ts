import type { Kysely } from 'kysely'
import type { OrderStatus, ShippingAddress } from '../../shared/schemas/order'
import type { SignedInUser } from '../../shared/types/roles'
import { changeOrderStatus, settleOrder } from '../../server/utils/orders/change'
import { cancelOrder } from '../../server/utils/orders/cancel'
import { createOrder } from '../../server/utils/orders/create'
import { refundOrder } from '../../server/utils/orders/refunds'
import { createHeadSpec } from '../../server/utils/designs/specs'
import type { DB } from '../database'

interface DemoOrder { customer: string, filmId: string, diameterMm: number, pitchHz: number, note: string, daysAgo: number, ends: OrderStatus }

const demoOrders: DemoOrder[] = [
  { customer: 'player', filmId: 'pet-250', diameterMm: 349.2, pitchHz: 146.8, note: 'For the ash floor tom. A dry room.', daysAgo: 96, ends: 'delivered' },
  { customer: 'orchestra', filmId: 'pet-haze-200', diameterMm: 654, pitchHz: 98, note: 'For the 26 in kettle.', daysAgo: 41, ends: 'delivered' },
  { customer: 'studio', filmId: 'pet-2x188', diameterMm: 400, pitchHz: 120, note: 'Short decay wanted.', daysAgo: 19, ends: 'shipped' },
  { customer: 'school', filmId: 'pet-250-frost', diameterMm: 323.8, pitchHz: 164.8, note: '', daysAgo: 13, ends: 'tuned' },
  { customer: 'player', filmId: 'pet-250', diameterMm: 298.4, pitchHz: 174.6, note: '', daysAgo: 9, ends: 'in-making' },
  { customer: 'band', filmId: 'woven-280', diameterMm: 349.2, pitchHz: 220, note: 'Field drum, outdoors in all weathers.', daysAgo: 22, ends: 'in-making' },
  { customer: 'noor', filmId: 'skin-calf', diameterMm: 273, pitchHz: 196, note: 'Thicker half of the skin, please.', daysAgo: 3, ends: 'paid' },
  { customer: 'tomas', filmId: 'pet-188', diameterMm: 450.8, pitchHz: 98, note: '', daysAgo: 1, ends: 'paid' },
  { customer: 'player', filmId: 'pet-188', diameterMm: 247.6, pitchHz: 196, note: '', daysAgo: 0.2, ends: 'awaiting-payment' },
  { customer: 'petra', filmId: 'skin-goat', diameterMm: 400, pitchHz: 110, note: 'Changed my mind on the size.', daysAgo: 30, ends: 'cancelled' },
  { customer: 'sander', filmId: 'pet-188', diameterMm: 349.2, pitchHz: 196, note: '', daysAgo: 55, ends: 'refunded' },
]

const address = (name: string): ShippingAddress => ({ name, line1: '4 Millrace Lane', line2: null, city: 'Lowen', postalCode: '20457', country: 'DE' })

/** The moves of the bench after payment, in order. */
const MAKING: OrderStatus[] = ['in-making', 'tuned', 'shipped', 'delivered']

/** Orders in every state, made by the same functions as real ones and paid at the local payment stand-in. */
export async function seedOrders(db: Kysely<DB>, people: Map<string, SignedInUser>, standIn: string, now: Date): Promise<void> {
  for (const plan of demoOrders) {
    const customer = people.get(plan.customer)!
    const spec = await createHeadSpec(db, customer, { instrumentId: null, diameterMm: plan.diameterMm, filmId: plan.filmId, target: { kind: 'pitch', hz: plan.pitchHz }, note: plan.note })
    if (!spec.reachable) throw new Error(`A head of the demo cannot be made: ${spec.message}`)
    const { order } = await createOrder(db, customer, { headSpecIds: [spec.id], shippingAddress: address(customer.name) })
    await playOrder(db, people, standIn, order.id, plan)
    await placeInPast(db, order.id, new Date(now.getTime() - plan.daysAgo * 24 * 3600_000), now)
  }
}

async function playOrder(db: Kysely<DB>, people: Map<string, SignedInUser>, standIn: string, id: string, plan: DemoOrder): Promise<void> {
  const staff = people.get('staff')!
  if (plan.ends === 'awaiting-payment') return
  if (plan.ends === 'cancelled') return cancelOrder(db, people.get(plan.customer)!, id, plan.note)
  const { checkout_session_id: session } = await db.selectFrom('orders').select('checkout_session_id').where('id', '=', id).executeTakeFirstOrThrow()
  const paid = await fetch(`${standIn}/stand-in/sessions/${session}/pay`, { method: 'POST' })
  if (!paid.ok) throw new Error(`The payment stand-in answered ${paid.status}.`)
  await settleOrder(db, staff, id)
  if (plan.ends === 'refunded') {
    const { total_minor: amountMinor } = await db.selectFrom('orders').select('total_minor').where('id', '=', id).executeTakeFirstOrThrow()
    return refundOrder(db, staff, id, { amountMinor, reason: 'The drum was sold before the head was made.' })
  }
  for (const to of MAKING.slice(0, MAKING.indexOf(plan.ends) + 1)) {
    await changeOrderStatus(db, to === 'in-making' || to === 'tuned' ? people.get('maker')! : staff, id, to, null)
  }
}

/** Moves an order and its history back in time, evenly between its day and now. */
async function placeInPast(db: Kysely<DB>, id: string, from: Date, now: Date): Promise<void> {
  const history = await db.selectFrom('order_history').select('id').where('order_id', '=', id).orderBy('id').execute()
  const span = Math.min(now.getTime() - from.getTime(), 15 * 24 * 3600_000)
  const at = (index: number) => new Date(from.getTime() + span * index / (history.length + 0.5))
  for (const [index, row] of history.entries()) {
    // The demo alone rewrites time: a running workshop's history is never touched.
    await db.updateTable('order_history').set({ at: at(index) } as never).where('id', '=', row.id).execute()
  }
  await db.updateTable('payments').set({ created_at: at(1) } as never).where('order_id', '=', id).execute()
  await db.updateTable('refunds').set({ created_at: at(history.length - 1) } as never).where('order_id', '=', id).execute()
  await db.updateTable('head_specs').set({ created_at: from } as never)
    .where('id', 'in', eb => eb.selectFrom('order_heads').select('head_spec_id').where('order_id', '=', id)).execute()
  await db.updateTable('orders').set({ created_at: from, updated_at: at(history.length - 1) } as never).where('id', '=', id).execute()
  const order = await db.selectFrom('orders').select('due_on').where('id', '=', id).executeTakeFirstOrThrow()
  if (order.due_on) {
    const due = new Date(order.due_on)
    due.setUTCDate(due.getUTCDate() - Math.round((now.getTime() - from.getTime()) / (24 * 3600_000)))
    await db.updateTable('orders').set({ due_on: due }).where('id', '=', id).execute()
  }
}
