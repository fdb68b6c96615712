import type { DB, Kysely } from '../core/db'

export interface AuditEntry { actor: string | null, action: string, subjectType: string, subjectId: string | null, detail?: Record<string, unknown> }

/** Who did what: written in the transaction that does it. */
export async function recordAudit(db: Kysely<DB>, entry: AuditEntry): Promise<void> {
  await db.insertInto('audit_events').values({
    actor_id: entry.actor, action: entry.action, subject_type: entry.subjectType, subject_id: entry.subjectId, detail: JSON.stringify(entry.detail ?? {}),
  }).execute()
}
