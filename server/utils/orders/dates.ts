import { sql } from 'kysely'

/** A `date` column as text: pg would hand over midnight of the server's own zone. */
export const dueOnText = sql<string | null>`orders.due_on::text`.as('due_text')

/** Promised for an earlier day and not yet out of the house. */
export const isOverdue = sql<boolean>`(orders.due_on < current_date and orders.status in ('paid', 'in-making', 'tuned'))`
