import { sql } from 'kysely'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { enqueue } from '../core/jobs'
import type { PersonPatchBody } from '../../../shared/schemas/people'
import type { SignedInUser } from '../../../shared/types/roles'
import { recordAudit } from './audit'
import { revokeSessions } from './session'
import { withdrawTokens } from './tokens'

type Viewer = Pick<SignedInUser, 'id' | 'role'>

/**
 * A new role, or an account closed or opened again. Ends the person's sessions at once.
 * @throws DomainError not-found; conflict for oneself and for the last owner
 */
export async function changePerson(db: Kysely<DB>, id: string, patch: PersonPatchBody, by: Viewer): Promise<void> {
  await db.transaction().execute(async (trx) => {
    const { before, otherOwners } = await lockWithOwners(trx, id, by)
    const active = before.deactivated_at === null
    const role = patch.role ?? before.role
    const staysActive = patch.active ?? active
    if (role === before.role && staysActive === active) return
    if (id === by.id) throw new DomainError('conflict', 'You cannot change your own role or close your own account. Another owner can.')
    const ceasesToOwn = before.role === 'owner' && active && (role !== 'owner' || !staysActive)
    if (ceasesToOwn && !otherOwners) throw new DomainError('conflict', 'This is the last owner. Make somebody else an owner first.')

    await trx.updateTable('users').set({ role, deactivated_at: staysActive ? null : before.deactivated_at ?? sql`now()` }).where('id', '=', id).execute()
    await revokeSessions(id, trx)
    if (!staysActive) await withdrawTokens(trx, id, ['confirm-email', 'reset-password', 'invitation'])
    const audit = (action: string, detail = {}) => recordAudit(trx, { actor: by.id, action, subjectType: 'user', subjectId: id, detail })
    if (role !== before.role) await audit('role-changed', { from: before.role, to: role })
    if (staysActive !== active) await audit(staysActive ? 'person-reactivated' : 'person-deactivated')
  })
}

/** The person and every owner, locked in one order: of two owners who remove each other at the same moment, the second is refused. */
async function lockWithOwners(trx: Transaction<DB>, id: string, by: Viewer) {
  const rows = await trx.selectFrom('users').select(['id', 'role', 'deactivated_at'])
    .where(eb => eb.or([eb('id', '=', id), eb('role', '=', 'owner')])).orderBy('id').forUpdate().execute()
  const before = rows.find(row => row.id === id)
  if (!before) throw notFound('This person')
  const owners = rows.filter(row => row.role === 'owner' && row.deactivated_at === null)
  if (!owners.some(owner => owner.id === by.id)) throw new DomainError('not-allowed', 'You are no longer an owner.')
  return { before, otherOwners: owners.filter(owner => owner.id !== id).length }
}

/** Sends the invitation again to somebody who has not chosen a password yet. @throws DomainError not-found, conflict */
export async function inviteAgain(db: Kysely<DB>, id: string, by: Viewer): Promise<void> {
  await db.transaction().execute(async (trx) => {
    const person = await lockPerson(trx, id)
    if (by.role !== 'owner' && person.role !== 'customer') throw notFound('This person')
    if (person.password_hash || person.deactivated_at) throw new DomainError('conflict', 'This person has a password already, or the account is closed.')
    await withdrawTokens(trx, id, ['invitation'])
    await enqueue(trx, 'mail', { kind: 'invitation', id })
    await recordAudit(trx, { actor: by.id, action: 'person-invited-again', subjectType: 'user', subjectId: id })
  })
}

async function lockPerson(trx: Transaction<DB>, id: string) {
  const row = await trx.selectFrom('users').select(['id', 'role', 'deactivated_at', 'password_hash']).where('id', '=', id).forUpdate().executeTakeFirst()
  if (!row) throw notFound('This person')
  return row
}
