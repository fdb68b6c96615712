import { sql } from 'kysely'
import { z } from 'zod'
import type { ordersQuery, OrdersPage } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { decodeCursor, encodeCursor, TIMESTAMP_TEXT } from '../core/cursor'
import { containsPattern } from '../core/search'
import { dueOnText, isOverdue } from './dates'
import { toOrderRowView } from './views'

// Where a page ends.
const cursorSchema = z.tuple([z.string().regex(TIMESTAMP_TEXT), z.uuid()])
const STRANGE_CURSOR = { message: 'This list has moved on. Open it again from its beginning.', field: 'This cursor is not one that we gave out.' }

/** Newest first: a customer's own, or everybody's for the workshop. */
export async function listOrders(db: Kysely<DB>, user: SignedInUser, query: z.output<typeof ordersQuery>): Promise<OrdersPage> {
  const after = query.cursor === undefined ? undefined : decodeCursor(query.cursor, cursorSchema, STRANGE_CURSOR)
  const like = query.q ? containsPattern(query.q) : undefined
  const filtered = db.selectFrom('orders').innerJoin('users', 'users.id', 'orders.customer_id')
    .$if(user.role === 'customer', part => part.where('orders.customer_id', '=', user.id))
    .$if(query.status !== undefined, part => part.where('orders.status', '=', query.status!))
    .$if(query.overdue === true, part => part.where(isOverdue))
    .$if(like !== undefined, part => part.where(({ or, eb }) => or([eb('orders.number', 'ilike', like!), eb('users.name', 'ilike', like!), eb('users.email', 'ilike', like!)])))
  const rows = await filtered
    .$if(after !== undefined, part => part.where(sql<boolean>`(orders.created_at, orders.id) < (${after?.[0]}::timestamptz, ${after?.[1]}::uuid)`))
    .select([
      'orders.id', 'orders.number', 'orders.status', 'orders.total_minor', 'orders.currency', 'orders.customer_id', 'orders.created_at', 'orders.attention',
      'users.name as customer_name', dueOnText, isOverdue.as('overdue'), sql<string>`orders.created_at::text`.as('created_text'),
      sql<string[] | null>`(
        select array_agg(coalesce(head_specs.film ->> 'name', films.name) || ', ' || round(head_specs.diameter_mm)::text || ' mm' order by order_heads.position)
        from order_heads join head_specs on head_specs.id = order_heads.head_spec_id join films on films.id = head_specs.film_id
        where order_heads.order_id = orders.id)`.as('heads'),
    ])
    .orderBy('orders.created_at', 'desc').orderBy('orders.id', 'desc').limit(query.limit + 1).execute()
  const { total } = await filtered.select(({ fn }) => fn.countAll<number>().as('total')).executeTakeFirstOrThrow()
  const items = rows.slice(0, query.limit)
  const last = rows.length > query.limit ? items.at(-1) : undefined
  return { items: items.map(row => toOrderRowView(row, user)), total: Number(total), next: last ? encodeCursor([last.created_text, last.id]) : null }
}
