import type { Role, SignedInUser } from '../../../shared/types/roles'
import { type DB, type Transaction, useDb } from '../core/db'
import { DomainError } from '../core/errors'
import { enqueue } from '../core/jobs'
import { beginAttempt, mayWriteTo } from './attempts'
import { recordAudit } from './audit'
import { hashArgon2id, isPassword } from './passwords'
import { revokeSessions } from './session'
import { spendToken, withdrawTokens } from './tokens'

/** @throws DomainError wrong-credentials, email-unconfirmed, too-many-tries */
export async function checkCredentials(email: string, password: string, ip: string): Promise<SignedInUser> {
  const { confirmed, user } = await findByCredentials(email, password, ip)
  if (!confirmed) throw new DomainError('email-unconfirmed', 'Confirm your e-mail address first: we have sent you a link. You can ask for a new one.')
  return user
}

async function findByCredentials(email: string, password: string, ip: string): Promise<{ user: SignedInUser, confirmed: boolean }> {
  const attempt = await beginAttempt(email, ip)
  const row = await useDb().selectFrom('users').selectAll().where('email', '=', email).where('deactivated_at', 'is', null).executeTakeFirst()
  if (!await isPassword(password, row?.password_hash) || !row) {
    throw new DomainError('wrong-credentials', 'This e-mail address and password do not belong together.')
  }
  await attempt.right()
  return { user: { id: row.id, name: row.name, email: row.email, role: row.role }, confirmed: row.email_confirmed_at !== null }
}

/** @throws DomainError conflict when the address has an account; too-many-tries */
export async function signUp(person: { name: string, email: string, password: string }, ip: string): Promise<void> {
  await mayWriteTo(person.email, ip)
  const passwordHash = await hashArgon2id(person.password)
  await useDb().transaction().execute(async (trx) => {
    const id = await insertUser(trx, { ...person, role: 'customer', passwordHash })
    await enqueue(trx, 'mail', { kind: 'confirm-email', id })
  })
}

/**
 * A new confirmation link for whoever knows the password; others get one by choosing a new password. Were a link sent to
 * anyone who asks, a stranger could open an account for an address and have its holder confirm the stranger's password.
 * @throws DomainError wrong-credentials, too-many-tries
 */
export async function resendConfirmation(email: string, password: string, ip: string): Promise<void> {
  const { user, confirmed } = await findByCredentials(email, password, ip)
  if (confirmed || !await mayWriteTo(email, ip)) return
  await useDb().transaction().execute(trx => enqueue(trx, 'mail', { kind: 'confirm-email', id: user.id }))
}

/**
 * Opens an account for somebody who then chooses a password by mail.
 * @throws DomainError not-allowed when anyone but the owner opens a workshop account; conflict
 */
export async function invitePerson(person: { name: string, email: string, role: Role }, by: SignedInUser): Promise<string> {
  if (person.role !== 'customer' && by.role !== 'owner') throw new DomainError('not-allowed', 'Only the owner opens accounts for people of the workshop.')
  return useDb().transaction().execute(async (trx) => {
    const id = await insertUser(trx, { ...person, passwordHash: null })
    await enqueue(trx, 'mail', { kind: 'invitation', id })
    await recordAudit(trx, { actor: by.id, action: 'person-invited', subjectType: 'user', subjectId: id, detail: { role: person.role } })
    return id
  })
}

async function insertUser(trx: Transaction<DB>, person: { name: string, email: string, role: Role, passwordHash: string | null }): Promise<string> {
  const row = await trx.insertInto('users')
    .values({ name: person.name, email: person.email, role: person.role, password_hash: person.passwordHash, email_confirmed_at: null, deactivated_at: null })
    .onConflict(conflict => conflict.column('email').doNothing()).returning('id').executeTakeFirst()
  if (!row) throw new DomainError('conflict', 'There is an account with this e-mail address already. Sign in, or ask for a new password.', [{ path: 'email', message: 'This address has an account already.' }])
  return row.id
}

/** @throws DomainError link-expired */
export async function confirmEmail(token: string): Promise<void> {
  await useDb().transaction().execute(async (trx) => {
    const userId = await spendToken(trx, token, ['confirm-email'])
    await trx.updateTable('users').set({ email_confirmed_at: new Date() }).where('id', '=', userId).execute()
    await withdrawTokens(trx, userId, ['confirm-email'])
  })
}

/** Below this the time of an answer would tell whether the address is known: queueing a letter takes some milliseconds. */
const SAME_TIME_MS = 150

/** Says nothing about whether the address is known. @throws DomainError too-many-tries */
export async function requestPasswordReset(email: string, ip: string): Promise<void> {
  const same = new Promise(resolve => setTimeout(resolve, SAME_TIME_MS))
  if (await mayWriteTo(email, ip)) {
    await useDb().transaction().execute(async (trx) => {
      const user = await trx.selectFrom('users').select(['id', 'password_hash']).where('email', '=', email).where('deactivated_at', 'is', null).executeTakeFirst()
      if (user) await enqueue(trx, 'mail', { kind: user.password_hash === null ? 'invitation' : 'reset-password', id: user.id })
    })
  }
  await same
}

/** Whoever holds the mailed token also holds the mailbox, so the address counts as confirmed. Ends all sessions and other links. */
export async function resetPassword(token: string, password: string): Promise<void> {
  const passwordHash = await hashArgon2id(password)
  await useDb().transaction().execute(async (trx) => {
    const userId = await spendToken(trx, token, ['reset-password', 'invitation'])
    await trx.updateTable('users').set({ password_hash: passwordHash, email_confirmed_at: new Date() }).where('id', '=', userId).execute()
    await endOldAccess(trx, userId, 'password-reset')
  })
}

/** @throws DomainError wrong-credentials, too-many-tries */
export async function changePassword(user: SignedInUser, current: string, password: string, ip: string): Promise<void> {
  const attempt = await beginAttempt(user.email, ip)
  const row = await useDb().selectFrom('users').select('password_hash').where('id', '=', user.id).executeTakeFirstOrThrow()
  if (!await isPassword(current, row.password_hash)) {
    throw new DomainError('wrong-credentials', 'Your present password is not right.', [{ path: 'current', message: 'This is not your present password.' }])
  }
  await attempt.right()
  const passwordHash = await hashArgon2id(password)
  await useDb().transaction().execute(async (trx) => {
    await trx.updateTable('users').set({ password_hash: passwordHash }).where('id', '=', user.id).execute()
    await endOldAccess(trx, user.id, 'password-changed')
  })
}

async function endOldAccess(trx: Transaction<DB>, userId: string, action: 'password-reset' | 'password-changed'): Promise<void> {
  await revokeSessions(userId, trx)
  await withdrawTokens(trx, userId, ['confirm-email', 'reset-password', 'invitation'])
  await recordAudit(trx, { actor: userId, action, subjectType: 'user', subjectId: userId })
}
