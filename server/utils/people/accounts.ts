import argon2 from 'argon2'
import type { Role, SignedInUser } from '../../../shared/types/roles'
import { type DB, type Transaction, useDb } from '../core/db'
import { DomainError } from '../core/errors'
import { enqueue } from '../core/jobs'
import { recordAudit } from './audit'
import { hashArgon2id } from './passwords'
import { revokeSessions } from './session'
import { spendToken } from './tokens'
import { attemptLimiter } from './attempts'

/** Checked when the address is unknown, so that the answer takes as long as for a known one. */
let decoy: Promise<string> | undefined

/** @throws DomainError wrong-credentials, email-unconfirmed, too-many-tries */
export async function checkCredentials(email: string, password: string, ip: string): Promise<SignedInUser> {
  await attemptLimiter.refuseIfSpent(email, ip)
  const user = await useDb().selectFrom('users').selectAll().where('email', '=', email).where('deactivated_at', 'is', null).executeTakeFirst()
  const right = await argon2.verify(user?.password_hash ?? await (decoy ??= hashArgon2id('no such person')), password)
  if (!user?.password_hash || !right) {
    await attemptLimiter.countFailure(email, ip)
    throw new DomainError('wrong-credentials', 'This e-mail address and password do not belong together.')
  }
  await attemptLimiter.clear(email, ip)
  if (!user.email_confirmed_at) throw new DomainError('email-unconfirmed', 'Confirm your e-mail address first: we have sent you a link. You can ask for a new one.')
  return { id: user.id, name: user.name, email: user.email, role: user.role }
}

/** @throws DomainError conflict when the address has an account */
export async function signUp(person: { name: string, email: string, password: string }): Promise<void> {
  const passwordHash = await hashArgon2id(person.password)
  await useDb().transaction().execute(async (trx) => {
    const id = await insertUser(trx, { ...person, role: 'customer', passwordHash })
    await enqueue(trx, 'mail', { kind: 'confirm-email', id })
  })
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

export async function confirmEmail(token: string): Promise<void> {
  await useDb().transaction().execute(async (trx) => {
    const userId = await spendToken(trx, token, ['confirm-email'])
    await trx.updateTable('users').set({ email_confirmed_at: new Date() }).where('id', '=', userId).execute()
  })
}

/** Says nothing about whether the address is known. */
export async function requestPasswordReset(email: string): Promise<void> {
  await useDb().transaction().execute(async (trx) => {
    const user = await trx.selectFrom('users').select(['id', 'email_confirmed_at', 'password_hash']).where('email', '=', email).where('deactivated_at', 'is', null).executeTakeFirst()
    if (!user) return
    const kind = user.password_hash === null ? 'invitation' : user.email_confirmed_at ? 'reset-password' : 'confirm-email'
    await enqueue(trx, 'mail', { kind, id: user.id })
  })
}

/** Whoever holds the mailed token also holds the mailbox, so the address counts as confirmed. Ends all sessions. */
export async function resetPassword(token: string, password: string): Promise<void> {
  const passwordHash = await hashArgon2id(password)
  await useDb().transaction().execute(async (trx) => {
    const userId = await spendToken(trx, token, ['reset-password', 'invitation'])
    await trx.updateTable('users').set({ password_hash: passwordHash, email_confirmed_at: new Date() }).where('id', '=', userId).execute()
    await revokeSessions(userId, trx)
    await recordAudit(trx, { actor: userId, action: 'password-reset', subjectType: 'user', subjectId: userId })
  })
}

/** @throws DomainError wrong-credentials */
export async function changePassword(user: SignedInUser, current: string, password: string): Promise<void> {
  const row = await useDb().selectFrom('users').select('password_hash').where('id', '=', user.id).executeTakeFirstOrThrow()
  if (!row.password_hash || !await argon2.verify(row.password_hash, current)) {
    throw new DomainError('wrong-credentials', 'Your present password is not right.', [{ path: 'current', message: 'This is not your present password.' }])
  }
  const passwordHash = await hashArgon2id(password)
  await useDb().transaction().execute(async (trx) => {
    await trx.updateTable('users').set({ password_hash: passwordHash }).where('id', '=', user.id).execute()
    await revokeSessions(user.id, trx)
    await recordAudit(trx, { actor: user.id, action: 'password-changed', subjectType: 'user', subjectId: user.id })
  })
}
