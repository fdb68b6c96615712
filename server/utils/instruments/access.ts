import { type ExpressionBuilder, sql, type SqlBool } from 'kysely'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB } from '../core/db'

/*
 * Security model: people of the workshop see every instrument, a customer only what carries the customer's own id. The
 * condition goes into each query's WHERE, so what is not yours looks exactly like what does not exist.
 */
type Viewer = Pick<SignedInUser, 'id' | 'role'>

/** Condition on `instruments`: those that this person may see. */
export const visibleTo = (user: Viewer) => (eb: ExpressionBuilder<DB, 'instruments'>) =>
  user.role === 'customer' ? eb('instruments.customer_id', '=', user.id) : sql<SqlBool>`true`
