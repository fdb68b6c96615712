import type { RereadingBody, RereadingRunView, RereadingView } from '../../../shared/schemas/rereading'
import type { SignedInUser } from '../../../shared/types/roles'
import type { RereadingRunRow } from '../../../db/rereading.table'
import { ANALYSIS_VERSION } from '../analysis/version'
import { type DB, isUniqueViolation, type Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { enqueue } from '../core/jobs'
import { recordAudit } from '../people/audit'
import { countOldRecordings } from './old'

type Actor = Pick<SignedInUser, 'id'>
interface RunRecord extends RereadingRunRow { by_name: string | null }

const runs = (db: Kysely<DB>) => db.selectFrom('rereading_runs').leftJoin('users', 'users.id', 'rereading_runs.started_by').selectAll('rereading_runs').select('users.name as by_name')

/** How many recordings are old and why, and the run that is under way or came last. */
export async function getRereading(db: Kysely<DB>): Promise<RereadingView> {
  const [old, run] = await Promise.all([countOldRecordings(db), runs(db).orderBy('started_at', 'desc').limit(1).executeTakeFirst()])
  return { version: ANALYSIS_VERSION, old, run: run ? toRunView(run) : null }
}

function toRunView(row: RunRecord): RereadingRunView {
  return {
    id: row.id, version: row.version, total: Math.max(row.total, row.read + row.refused + row.failed), read: row.read, refused: row.refused, failed: row.failed,
    state: row.finished_at ? 'finished' : row.cancelled_at ? 'cancelled' : 'running',
    startedAt: row.started_at.toISOString(), endedAt: (row.finished_at ?? row.cancelled_at)?.toISOString() ?? null, byName: row.by_name,
  }
}

/**
 * Starts reading all old recordings again in the background.
 * @throws DomainError conflict when a run is under way, when no recording is old, or when another version runs now
 */
export async function startRereading(db: Kysely<DB>, { version }: RereadingBody, by: Actor): Promise<RereadingView> {
  if (version !== ANALYSIS_VERSION) throw new DomainError('conflict', `The analysis that runs now is version ${ANALYSIS_VERSION}. Reload the page and look at the counts again.`)
  const old = await countOldRecordings(db)
  const total = old.byVersion + old.byFigures
  if (!total) throw new DomainError('conflict', 'Every recording has been read by this version with the figures of its drum as they are. There is nothing to read again.')
  try {
    await db.transaction().execute(async (trx) => {
      const { id } = await trx.insertInto('rereading_runs').values({ version: ANALYSIS_VERSION, total, started_by: by.id }).returning('id').executeTakeFirstOrThrow()
      await recordAudit(trx, { actor: by.id, action: 'rereading-started', subjectType: 'rereading', subjectId: id, detail: { version: ANALYSIS_VERSION, total } })
      await enqueue(trx, 'rereading', { id })
    })
  } catch (error) {
    if (isUniqueViolation(error)) throw new DomainError('conflict', 'Old recordings are being read again already. Wait for that, or stop it first.')
    throw error
  }
  return getRereading(db)
}

/** Stops a run; what was read stays. @throws DomainError not-found; conflict when it has ended */
export async function cancelRereading(db: Kysely<DB>, id: string, by: Actor): Promise<RereadingView> {
  await db.transaction().execute(async (trx) => {
    const run = await trx.selectFrom('rereading_runs').selectAll().where('id', '=', id).forUpdate().executeTakeFirst()
    if (!run) throw notFound('This run')
    if (run.finished_at || run.cancelled_at) throw new DomainError('conflict', 'This run has ended already.')
    await trx.updateTable('rereading_runs').set({ cancelled_at: new Date(), cancelled_by: by.id }).where('id', '=', id).execute()
    await recordAudit(trx, { actor: by.id, action: 'rereading-cancelled', subjectType: 'rereading', subjectId: id })
  })
  return getRereading(db)
}
