import { sql } from 'kysely'
import { useDb } from './db'
import { DomainError } from './errors'

/** @throws DomainError busy when the database does not answer within 3 s */
export async function checkHealth(): Promise<{ status: 'ok' }> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error('late')), 3_000)
  })
  try {
    await Promise.race([sql`select 1`.execute(useDb()), late])
    return { status: 'ok' }
  } catch {
    throw new DomainError('busy', 'The database does not answer.')
  } finally {
    clearTimeout(timer)
  }
}
