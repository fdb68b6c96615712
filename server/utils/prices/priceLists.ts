import { sql } from 'kysely'
import { priceListSchema, type PriceList } from '../../../shared/schemas/prices'
import type { DB, Kysely } from '../core/db'
import { DEFAULT_CURRENCY, defaultPriceList } from './defaultPriceList'

export interface DatedPriceList { id: string, currency: string, validFrom: Date, prices: PriceList }

/** Any number that is ours alone: two servers that start at once must not both write the first list. */
const FIRST_LIST_LOCK = 51_001

/** Writes the first price list where there is none. Harmless to call again. */
export async function ensurePriceList(db: Kysely<DB>): Promise<void> {
  await db.transaction().execute(async (trx) => {
    await sql`select pg_advisory_xact_lock(${FIRST_LIST_LOCK})`.execute(trx)
    if (await trx.selectFrom('price_lists').select('id').limit(1).executeTakeFirst()) return
    await trx.insertInto('price_lists')
      .values({ valid_from: new Date('2026-01-01T00:00:00Z'), currency: DEFAULT_CURRENCY, prices: JSON.stringify(defaultPriceList), created_by: null })
      .execute()
  })
}

/** The list that holds now. */
export async function getPriceList(db: Kysely<DB>): Promise<DatedPriceList> {
  const find = () => db.selectFrom('price_lists').selectAll().where('valid_from', '<=', new Date()).orderBy('valid_from', 'desc').orderBy('created_at', 'desc').limit(1).executeTakeFirst()
  let row = await find()
  if (!row) {
    await ensurePriceList(db)
    row = await find()
  }
  if (!row) throw new Error('no price list is valid yet')
  return toDatedPriceList(row)
}

export async function getPriceListById(db: Kysely<DB>, id: string): Promise<DatedPriceList> {
  return toDatedPriceList(await db.selectFrom('price_lists').selectAll().where('id', '=', id).executeTakeFirstOrThrow())
}

function toDatedPriceList(row: { id: string, currency: string, valid_from: Date, prices: unknown }): DatedPriceList {
  return { id: row.id, currency: row.currency, validFrom: row.valid_from, prices: priceListSchema.parse(row.prices) }
}
