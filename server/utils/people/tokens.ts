import { createHash, randomBytes } from 'node:crypto'
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
 * Uses a token up and says whose it was.
 * @throws DomainError link-expired when it is unknown, used or too old
 */
export async function spendToken(trx: Transaction<DB>, token: string, kinds: UserTokenKind[]): Promise<string> {
  const row = await trx.updateTable('user_tokens').set({ used_at: new Date() })
    .where('token_hash', '=', hash(token)).where('kind', 'in', kinds).where('used_at', 'is', null).where('expires_at', '>', new Date())
    .returning('user_id').executeTakeFirst()
  if (!row) throw new DomainError('link-expired', 'This link has expired or was used already. Ask for a new one.')
  return row.user_id
}
