import { CompiledQuery } from 'kysely'
import PgBoss from 'pg-boss'
import type { DB, Transaction } from './db'
import { getConfig } from './config'
import { log } from './log'
import { deliverMail } from '../mail/deliver'
import { sendRefund } from '../payments/sendRefund'
import { settleOverdueCheckouts } from '../payments/sweep'
import { workOnRereading } from '../rereading/work'

/** Queues and what a job of each carries: ids only, never secrets; the worker reads the rest when it runs. */
export interface Jobs {
  'mail': { kind: MailKind, id: string }
  'refund': { id: string }
  'sweep-checkouts': Record<string, never>
  'rereading': { id: string }
}
export type MailKind = 'confirm-email' | 'reset-password' | 'invitation' | 'order-receipt'

const workers: { [Name in keyof Jobs]: (data: Jobs[Name]) => Promise<void> } = {
  'mail': deliverMail,
  'refund': ({ id }) => sendRefund(id),
  'sweep-checkouts': () => settleOverdueCheckouts(),
  'rereading': ({ id }) => workOnRereading(id),
}
/** `short` keeps one job waiting at most: a chain of jobs that is asked for twice stays one chain. */
const policies: Partial<Record<keyof Jobs, PgBoss.QueuePolicy>> = { rereading: 'short' }
const queues = Object.keys(workers) as (keyof Jobs)[]

let boss: PgBoss | undefined
let ready: Promise<PgBoss> | undefined

export function startJobs(): Promise<PgBoss> {
  return ready ??= (async () => {
    boss = new PgBoss({ connectionString: getConfig().databaseUrl, schema: 'pgboss', max: 3 })
    boss.on('error', error => log.error({ err: error }, 'job queue'))
    await boss.start()
    for (const name of queues) {
      await boss.createQueue(name, { name, policy: policies[name] ?? 'standard' })
      await boss.work<Jobs[typeof name]>(name, { pollingIntervalSeconds: 0.5, batchSize: 1 }, async ([job]) => {
        if (job) await workers[name](job.data as never)
      })
    }
    await boss.schedule('sweep-checkouts', '*/15 * * * *', {})
    return boss
  })()
}

export async function stopJobs(): Promise<void> {
  await boss?.stop({ graceful: true, wait: true, timeout: 10_000 })
  boss = ready = undefined
}

/** Queues a job inside the caller's transaction: it exists exactly when the work that asked for it does. */
export async function enqueue<Name extends keyof Jobs>(trx: Transaction<DB>, name: Name, data: Jobs[Name]): Promise<void> {
  const queue = await startJobs()
  await queue.send(name, data, {
    retryLimit: 12, retryDelay: 2, retryBackoff: true,
    db: { executeSql: async (text, values) => ({ rows: (await trx.executeQuery(CompiledQuery.raw(text, values))).rows }) },
  })
}
