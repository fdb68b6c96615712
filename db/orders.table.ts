import type { ColumnType, Generated, Insertable, Selectable } from 'kysely'

type CreatedAt = ColumnType<Date, Date | undefined, never>
type Json<T> = ColumnType<T, string, string>

export type OrderStatus = 'awaiting-payment' | 'paid' | 'in-making' | 'tuned' | 'shipped' | 'delivered' | 'cancelled' | 'refunded'

export type PaymentStatus = 'pending' | 'succeeded' | 'failed'
export type RefundStatus = 'pending' | 'succeeded' | 'failed'

export interface PriceListsTable {
  id: Generated<string>
  valid_from: Date
  currency: string
  /** All figures in integer minor units; shape in shared/schemas/prices.ts. */
  prices: Json<unknown>
  created_by: string | null
  created_at: CreatedAt
}

export interface HeadSpecsTable {
  id: Generated<string>
  customer_id: string
  instrument_id: string | null
  diameter_mm: number
  film_id: string
  /** Drum and film as they stood when this was computed, so that it can be computed again. */
  drum: Json<unknown> | null
  film: Json<unknown> | null
  target: Json<unknown>
  note: string | null
  reachable: boolean
  message: string
  predicted: Json<unknown>
  /** Null when unreachable. */
  price: Json<unknown> | null
  price_list_id: string
  created_at: CreatedAt
}
export type HeadSpecRow = Selectable<HeadSpecsTable>

export interface OrdersTable {
  id: Generated<string>
  /** E.g. RW-1001. */
  number: Generated<string>
  customer_id: string
  status: OrderStatus
  currency: string
  total_minor: number
  shipping_address: Json<unknown>
  /** [{ label, amountMinor }]: what the customer agreed to. */
  lines: Json<unknown>
  checkout_session_id: string | null
  checkout_url: string | null
  due_on: Date | null
  /** Something that a person must look at: a wrong amount, a dispute, a refund that failed. */
  attention: string | null
  /** Set while the customer's bank disputes the payment. */
  disputed_at: Date | null
  created_at: CreatedAt
  updated_at: Generated<Date>
}
export type OrderRow = Selectable<OrdersTable>
export type NewOrder = Insertable<OrdersTable>

export interface OrderHeadsTable {
  order_id: string
  head_spec_id: string
  position: number
}

export interface OrderHistoryTable {
  id: Generated<string>
  order_id: string
  at: CreatedAt
  from_status: OrderStatus | null
  to_status: OrderStatus
  by_user: string | null
  /** Who or what moved it, in words: a name, or 'payment'. */
  by_label: string
  note: string | null
}

export interface PaymentsTable {
  id: Generated<string>
  order_id: string
  provider_ref: string
  amount_minor: number
  currency: string
  status: PaymentStatus
  created_at: CreatedAt
}

export interface RefundsTable {
  id: Generated<string>
  order_id: string
  payment_id: string
  provider_ref: string | null
  amount_minor: number
  currency: string
  reason: string
  status: RefundStatus
  by_user: string | null
  created_at: CreatedAt
}

export interface WebhookEventsTable {
  /** The provider's event id: the same event twice does its work once. */
  id: string
  type: string
  received_at: CreatedAt
}
