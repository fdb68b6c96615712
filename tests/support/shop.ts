// A customer's way to a paid order, for server tests.
import { sql } from 'kysely'
import Stripe from 'stripe'
import type { HeadSpecView, OrderView } from '../../shared/schemas/order'
import { database, playPayment, sessionIdOf, stack, type Answer, type Client, type Person } from './stack'

export type Shopper = Client & { person: Person }

export const address = { name: 'Ilse Brandt', line1: 'Mill Lane 3', line2: null, city: 'Aldertal', postalCode: '79100', country: 'DE' }

export interface Placed { order: { id: string, number: string, status: string, totalMinor: number, currency: string }, checkoutUrl: string }

/** A head that can be made, unless told otherwise: a 13.75 in head of the catalogue's 250 um film at D3. */
export async function designHead(shopper: Client, changes: Record<string, unknown> = {}): Promise<HeadSpecView> {
  const { status, body } = await shopper.post<HeadSpecView>('/api/head-specs', { instrumentId: null, diameterMm: 349.25, filmId: 'pet-250', target: { kind: 'pitch', hz: 146.83 }, note: null, ...changes })
  if (status !== 201) throw new Error(`Designing a head gave ${status}: ${JSON.stringify(body)}`)
  return body
}

export function placeOrder(shopper: Client, headSpecIds: string[], shippingAddress = address): Promise<Answer<Placed>> {
  return shopper.post<Placed>('/api/orders', { headSpecIds, shippingAddress })
}

export async function readOrder(reader: Client, id: string): Promise<OrderView> {
  const { status, body } = await reader.get<OrderView>(`/api/orders/${id}`)
  if (status !== 200) throw new Error(`Reading order ${id} gave ${status}`)
  return body
}

export interface OpenOrder { id: string, number: string, totalMinor: number, sessionId: string }

export async function openOrder(shopper: Client): Promise<OpenOrder> {
  const spec = await designHead(shopper)
  const { body } = await placeOrder(shopper, [spec.id])
  return { id: body.order.id, number: body.order.number, totalMinor: body.order.totalMinor, sessionId: sessionIdOf(body.checkoutUrl) }
}

export async function orderAndPay(shopper: Client): Promise<OpenOrder> {
  const order = await openOrder(shopper)
  const { delivered } = await playPayment(order.sessionId, 'pay')
  if (!delivered) throw new Error('The webhook of the payment was not taken')
  return order
}

const stripe = new Stripe('sk_test_of_no_account')

export interface EventDraft { id: string, type: string, object: object }

/** An event as the payment service sends it. Signed now and with the right secret, unless told otherwise. */
export async function sendEvent(draft: EventDraft, how: { secret?: string, signedAtS?: number, tamper?: (payload: string) => string } = {}): Promise<number> {
  const payload = JSON.stringify({ id: draft.id, object: 'event', type: draft.type, created: Math.floor(Date.now() / 1000), livemode: false, data: { object: draft.object } })
  const signature = stripe.webhooks.generateTestHeaderString({ payload, secret: how.secret ?? stack.stripeWebhookSecret, ...(how.signedAtS && { timestamp: how.signedAtS }) })
  const response = await fetch(`${stack.baseUrl}/api/webhooks/stripe`, {
    method: 'POST', headers: { 'content-type': 'application/json', 'stripe-signature': signature }, body: how.tamper ? how.tamper(payload) : payload,
  })
  await response.arrayBuffer()
  return response.status
}

let serial = 0
export const newEventId = () => `evt_test_${process.pid}_${Date.now()}_${++serial}`

/** The session of an order as the service would report it when paid. */
export function paidSession(order: OpenOrder, changes: Record<string, unknown> = {}): Record<string, unknown> {
  return {
    id: order.sessionId, object: 'checkout.session', status: 'complete', payment_status: 'paid', amount_total: order.totalMinor, currency: 'eur',
    payment_intent: `pi_test_${order.id}`, client_reference_id: order.id, metadata: { orderId: order.id }, ...changes,
  }
}

export const completed = (order: OpenOrder, changes: Record<string, unknown> = {}): EventDraft => ({ id: newEventId(), type: 'checkout.session.completed', object: paidSession(order, changes) })

/** Plants a database failure: while `act` runs, nothing can be written to this table for this order. */
export async function whileInsertsFail(table: 'order_history' | 'payments', orderId: string, act: () => Promise<void>): Promise<void> {
  const name = `fail_${table}_${orderId.replaceAll('-', '')}`
  await sql.raw(`create function ${name}() returns trigger language plpgsql as $$ begin if new.order_id = '${orderId}' then raise exception 'planted'; end if; return new; end $$`).execute(database())
  await sql.raw(`create trigger ${name} before insert on ${table} for each row execute function ${name}()`).execute(database())
  try {
    await act()
  } finally {
    await sql.raw(`drop trigger ${name} on ${table}; drop function ${name}`).execute(database())
  }
}
