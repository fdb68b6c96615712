import type { H3Event } from 'h3'
import type { Role, SignedInUser } from '../../../shared/types/roles'
import { sql } from 'kysely'
import { DomainError } from '../core/errors'
import { useDb } from '../core/db'

/*
 * Security model: the sealed cookie carries a session id; the row in `sessions` decides. Sign-out, a new password, a new
 * role and deactivation revoke rows, so they hold at once everywhere.
 */

/** Last-seen is written at most this often, so that reading a page does not write a row each time. */
const SEEN_EVERY_MS = 5 * 60_000

/** Whatever session this browser had before ends with it. */
export async function startSession(event: H3Event, user: SignedInUser): Promise<void> {
  await revokeCurrent(event)
  const { id } = await useDb().insertInto('sessions')
    .values({ user_id: user.id, user_agent: getRequestHeader(event, 'user-agent')?.slice(0, 200) ?? null })
    .returning('id').executeTakeFirstOrThrow()
  await replaceUserSession(event, { user, secure: { sessionId: id } })
}

export async function endSession(event: H3Event): Promise<void> {
  await revokeCurrent(event)
  await clearUserSession(event)
}

async function revokeCurrent(event: H3Event): Promise<void> {
  const sessionId = (await getUserSession(event)).secure?.sessionId
  if (sessionId) await useDb().updateTable('sessions').set({ revoked_at: new Date() }).where('id', '=', sessionId).where('revoked_at', 'is', null).execute()
}

export async function revokeSessions(userId: string, db = useDb()): Promise<void> {
  await db.updateTable('sessions').set({ revoked_at: new Date() }).where('user_id', '=', userId).where('revoked_at', 'is', null).execute()
}

/** The person behind the request as the database knows them now, or undefined. Read once a request. */
export async function findUser(event: H3Event): Promise<SignedInUser | undefined> {
  if (event.context.user !== undefined) return (event.context.user as SignedInUser | null) ?? undefined
  const sessionId = (await getUserSession(event)).secure?.sessionId
  const user = sessionId ? await readSession(sessionId) : undefined
  event.context.user = user ?? null
  return user
}

async function readSession(sessionId: string): Promise<SignedInUser | undefined> {
  const db = useDb()
  const row = await db.selectFrom('sessions').innerJoin('users', 'users.id', 'sessions.user_id')
    .select(['users.id', 'users.name', 'users.email', 'users.role', 'sessions.last_seen_at'])
    .where('sessions.id', '=', sessionId).where('sessions.revoked_at', 'is', null).where('users.deactivated_at', 'is', null)
    .where('sessions.last_seen_at', '>', sql<Date>`now() - interval '30 days'`)
    .executeTakeFirst()
  if (row && Date.now() - row.last_seen_at.getTime() > SEEN_EVERY_MS) {
    await db.updateTable('sessions').set({ last_seen_at: new Date() }).where('id', '=', sessionId).execute()
  }
  return row && { id: row.id, name: row.name, email: row.email, role: row.role }
}

/** @throws DomainError not-signed-in, not-allowed */
export async function requireUser(event: H3Event, access: 'signed-in' | readonly Role[]): Promise<SignedInUser> {
  const user = await findUser(event)
  if (!user) throw new DomainError('not-signed-in', 'You are not signed in, or your session has ended. Sign in and try again.')
  if (access !== 'signed-in' && !access.includes(user.role)) throw new DomainError('not-allowed', 'Your role does not cover this. Ask the owner of the workshop.')
  return user
}
