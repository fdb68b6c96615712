import type { ReadingView } from '../../../shared/schemas/reading'
import type { DB, Kysely } from '../core/db'
import { DomainError } from '../core/errors'
import { getReading, getReadingRow } from './find'
import { findNewestReading } from './newest'

/* Security model: exactly one reading, named in `settings`, is shown to everybody; nothing else is reachable from here. */

/** Key of the setting that names the reading of the public front page. */
export const SHOWCASE_READING = 'showcase-reading'

/** The showcase is looked at as the workshop itself sees it. */
const VIEWER = { id: '', role: 'owner' } as const

/** The reading of the public page, or null where the workshop has chosen none (or removed it since). */
export async function findShowcase(db: Kysely<DB>): Promise<ReadingView | null> {
  const setting = await db.selectFrom('settings').select('value').where('key', '=', SHOWCASE_READING).executeTakeFirst()
  if (typeof setting?.value !== 'string') return null
  try {
    const named = await getReadingRow(db, setting.value, VIEWER)
    // Read again since: the newest reading of that recording stands in the window.
    return await getReading(db, (await findNewestReading(db, named.recording_id))?.id ?? named.id, VIEWER)
  } catch (error) {
    if (error instanceof DomainError && error.code === 'not-found') return null
    throw error
  }
}
