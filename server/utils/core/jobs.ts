import { CompiledQuery } from 'kysely'
import PgBoss from 'pg-boss'
import type { DB, Transaction } from './db'
import { getConfig } from './config'
import { log } from './log'
import { deliverMail } from '../mail/deliver'

/** Queues and what a job of each carries: ids only, never secrets; the worker reads the rest when it runs. */
export interface Jobs {
  mail: { kind: MailKind, id: string }
}
export type MailKind = 'confirm-email' | 'reset-password' | 'invitation' | 'order-receipt'

let boss: PgBoss | undefined
let ready: Promise<PgBoss> | undefined

export function startJobs(): Promise<PgBoss> {
  return ready ??= (async () => {
    boss = new PgBoss({ connectionString: getConfig().databaseUrl, schema: 'pgboss', max: 3 })
    boss.on('error', error => log.error({ err: error }, 'job queue'))
    await boss.start()
    await boss.createQueue('mail')
    await boss.work<Jobs['mail']>('mail', { pollingIntervalSeconds: 0.5, batchSize: 1 }, async ([job]) => {
      if (job) await deliverMail(job.data)
    })
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
