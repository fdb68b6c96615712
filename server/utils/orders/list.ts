import { sql } from 'kysely'
import { z } from 'zod'
import type { ordersQuery, OrdersPage } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { DomainError } from '../core/errors'
import { dueOnText, isOverdue } from './dates'
import { toOrderRowView } from './views'

// Where a page ends. The time is kept as PostgreSQL's text: a JavaScript date would drop the microseconds and repeat rows.
const cursorSchema = z.tuple([z.string().regex(/^\d{4}-\d\d-\d\d \d\d:\d\d:\d\d(\.\d+)?[+-]\d\d(:\d\d)?$/), z.uuid()])

/** Newest first: a customer's own, or everybody's for the workshop. */
export async function listOrders(db: Kysely<DB>, user: SignedInUser, query: z.output<typeof ordersQuery>): Promise<OrdersPage> {
  const after = query.cursor === undefined ? undefined : readCursor(query.cursor)
  const like = query.q ? `%${query.q.replace(/[\\%_]/g, '\\$&')}%` : undefined
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
  return { items: items.map(row => toOrderRowView(row, user)), total: Number(total), next: last ? writeCursor(last.created_text, last.id) : null }
}

function writeCursor(createdAt: string, id: string): string {
  return Buffer.from(JSON.stringify([createdAt, id])).toString('base64url')
}

function readCursor(cursor: string): [string, string] {
  try {
    return cursorSchema.parse(JSON.parse(Buffer.from(cursor, 'base64url').toString('utf8')))
  } catch {
    throw new DomainError('bad-input', 'This list has moved on. Open it again from its beginning.', [{ path: 'cursor', message: 'This cursor is not one that we gave out.' }])
  }
}
