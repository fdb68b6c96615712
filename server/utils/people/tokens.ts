import { createHash, randomBytes } from 'node:crypto'
import { sql } from 'kysely'
import type { UserTokenKind } from '../../../db/people.table'
import { type DB, type Transaction, useDb } from '../core/db'
import { DomainError } from '../core/errors'

/* Security model: 32 random bytes travel by mail once; the database keeps their SHA-256, a lifetime and whether they were used. */

const LIFETIME_HOURS: Record<UserTokenKind, number> = { 'confirm-email': 48, 'reset-password': 1, 'invitation': 7 * 24 }

const hash = (token: string) => createHash('sha256').update(token).digest('hex')

export async function issueToken(userId: string, kind: UserTokenKind): Promise<string> {
  const token = randomBytes(32).toString('base64url')
  await useDb().insertInto('user_tokens').values({
    user_id: userId, kind, token_hash: hash(token), expires_at: new Date(Date.now() + LIFETIME_HOURS[kind] * 3_600_000), used_at: null,
  }).execute()
  return token
}

/**
 * Uses a token up and says whose it was; one statement, so of two that come at once only one has it.
 * @throws DomainError link-expired when it is unknown, used, too old, or of an account that was closed
 */
export async function spendToken(trx: Transaction<DB>, token: string, kinds: UserTokenKind[]): Promise<string> {
  const row = await trx.updateTable('user_tokens').set({ used_at: sql`now()` })
    .where('token_hash', '=', hash(token)).where('kind', 'in', kinds).where('used_at', 'is', null).where('expires_at', '>', sql<Date>`now()`)
    .where(eb => eb.exists(eb.selectFrom('users').select('users.id').whereRef('users.id', '=', 'user_tokens.user_id').where('users.deactivated_at', 'is', null)))
    .returning('user_id').executeTakeFirst()
  if (!row) throw new DomainError('link-expired', 'This link has expired or was used already. Ask for a new one.')
  return row.user_id
}

/** Letters already sent stop working. */
export async function withdrawTokens(trx: Transaction<DB>, userId: string, kinds: UserTokenKind[]): Promise<void> {
  await trx.updateTable('user_tokens').set({ used_at: sql`now()` }).where('user_id', '=', userId).where('kind', 'in', kinds).where('used_at', 'is', null).execute()
}
