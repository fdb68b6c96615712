import { sql, type SqlBool } from 'kysely'
import { z } from 'zod'
import type { PeoplePage, PeopleQuery, PersonView } from '../../../shared/schemas/people'
import type { SignedInUser } from '../../../shared/types/roles'
import { decodeCursor, encodeCursor } from '../core/cursor'
import { useDb } from '../core/db'
import { containsPattern } from '../core/search'

/** Where a page ended: name in lower case, without the NUL that PostgreSQL refuses, and id. */
const cursorSchema = z.tuple([z.string().regex(/^[^\0]*$/), z.uuid()])
const STRANGE_CURSOR = { message: 'This place in the list does not fit it. Open the list from its start.', field: 'We did not give out this cursor.' }

/** By name. The owner sees everyone; staff and makers see customers. @throws DomainError bad-input for a strange cursor */
export async function listPeople(query: PeopleQuery, viewer: Pick<SignedInUser, 'role'>): Promise<PeoplePage> {
  const after = query.cursor ? decodeCursor(query.cursor, cursorSchema, STRANGE_CURSOR) : undefined
  const pattern = query.q && containsPattern(query.q)
  const people = useDb().selectFrom('users')
    .$if(viewer.role !== 'owner', select => select.where('role', '=', 'customer'))
    .$if(Boolean(query.role), select => select.where('role', '=', query.role!))
    .$if(query.active !== undefined, select => select.where('deactivated_at', query.active ? 'is' : 'is not', null))
    .$if(Boolean(pattern), select => select.where(eb => eb.or([eb('name', 'ilike', pattern!), eb('email', 'ilike', pattern!)])))
  const [rows, { total }] = await Promise.all([
    people.select(['id', 'name', 'email', 'role', 'email_confirmed_at', 'deactivated_at', 'created_at'])
      .select(sql<boolean>`password_hash is not null`.as('has_password'))
      .select(eb => [
        eb.selectFrom('instruments').select(count => count.fn.countAll<number>().as('n')).whereRef('instruments.customer_id', '=', 'users.id').as('instruments'),
        eb.selectFrom('sessions').select(seen => seen.fn.max('sessions.last_seen_at').as('at')).whereRef('sessions.user_id', '=', 'users.id').as('last_seen_at'),
      ])
      .$if(Boolean(after), select => select.where(sql<SqlBool>`(lower(users.name), users.id) > (${after?.[0]}::text, ${after?.[1]}::uuid)`))
      .orderBy(sql`lower(users.name)`).orderBy('users.id').limit(query.limit + 1).execute(),
    people.select(eb => eb.fn.countAll<number>().as('total')).executeTakeFirstOrThrow(),
  ])
  const shown = rows.slice(0, query.limit)
  const last = shown.at(-1)
  return {
    items: shown.map((row): PersonView => ({
      id: row.id, name: row.name, email: row.email, role: row.role,
      state: row.deactivated_at ? 'closed' : !row.has_password ? 'invited' : row.email_confirmed_at ? 'active' : 'unconfirmed',
      instruments: row.instruments ?? 0, createdAt: row.created_at.toISOString(), lastSeenAt: row.last_seen_at?.toISOString() ?? null,
    })),
    total,
    next: last && rows.length > query.limit ? encodeCursor([last.name.toLowerCase(), last.id]) : null,
  }
}
