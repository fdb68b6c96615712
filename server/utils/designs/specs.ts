import type { HeadPrice, HeadSpecBody, HeadSpecView, QuoteView } from '../../../shared/schemas/order'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DesignDrum } from '../../../shared/utils/headDesign'
import { assessHead } from '../../../shared/utils/headDesignWords'
import type { HeadSpecRow } from '../../../db/orders.table'
import type { DB, Kysely } from '../core/db'
import { notFound } from '../core/errors'
import { addUp, findZone, headLines } from '../prices/calculate'
import { getPriceList } from '../prices/priceLists'
import { getDesignDrum, listDesignFilms, requireFilm } from './drums'

const DAY_MS = 24 * 3_600_000

/** Computes a head, stores it with its price, and says whether it can be had. */
export async function createHeadSpec(db: Kysely<DB>, user: SignedInUser, body: HeadSpecBody): Promise<HeadSpecView> {
  const [films, drum, list] = await Promise.all([listDesignFilms(db), getDesignDrum(db, user, body.instrumentId, body.diameterMm), getPriceList(db)])
  const film = requireFilm(films, body.filmId)
  const { predicted, reachable, message } = assessHead(drum, film, films, body.target)
  const price = reachable ? addUp(list.prices, list.currency, [headLines(list.prices, film, drum.diameterMm)], list.prices.homeCountry) : null
  const { id } = await db.insertInto('head_specs').values({
    customer_id: user.id, instrument_id: body.instrumentId ?? null, diameter_mm: drum.diameterMm, film_id: film.id,
    drum: JSON.stringify(drum), film: JSON.stringify(film), target: JSON.stringify(body.target), note: body.note || null, reachable, message,
    predicted: JSON.stringify(predicted), price: price && JSON.stringify(price), price_list_id: list.id,
  }).returning('id').executeTakeFirstOrThrow()
  return getHeadSpec(db, user, id)
}

/** What a head of this film and size costs now; stores nothing. */
export async function quoteHead(db: Kysely<DB>, query: { filmId: string, diameterMm: number, country?: string }): Promise<QuoteView> {
  const [films, list] = await Promise.all([listDesignFilms(db), getPriceList(db)])
  const country = query.country ?? list.prices.homeCountry
  const price = addUp(list.prices, list.currency, [headLines(list.prices, requireFilm(films, query.filmId), query.diameterMm)], country)
  return { ...price, zone: findZone(list.prices, country).label, validUntil: isoDay(Date.now() + list.prices.quoteDays * DAY_MS), makingDays: list.prices.makingDays }
}

/** Customers see their own, the workshop sees all. */
export async function getHeadSpec(db: Kysely<DB>, user: SignedInUser, id: string): Promise<HeadSpecView> {
  const row = await selectHeadSpecs(db).where('head_specs.id', '=', id)
    .$if(user.role === 'customer', query => query.where('head_specs.customer_id', '=', user.id)).executeTakeFirst()
  if (!row) throw notFound('The head')
  return toHeadSpecView(row)
}

export function selectHeadSpecs(db: Kysely<DB>) {
  return db.selectFrom('head_specs')
    .innerJoin('films', 'films.id', 'head_specs.film_id')
    .innerJoin('price_lists', 'price_lists.id', 'head_specs.price_list_id')
    .leftJoin('instruments', 'instruments.id', 'head_specs.instrument_id')
    .selectAll('head_specs')
    .select(['films.name as film_name', 'price_lists.prices', 'instruments.name as instrument_name', 'instruments.construction as instrument_construction'])
}

export type HeadSpecWithNames = HeadSpecRow & { film_name: string, prices: unknown, instrument_name: string | null, instrument_construction: DesignDrum['construction'] | null }

export function toHeadSpecView(row: HeadSpecWithNames): HeadSpecView {
  const predicted = row.predicted as HeadSpecView['predicted']
  return {
    id: row.id, instrumentId: row.instrument_id, instrumentName: row.instrument_name,
    construction: (row.drum as DesignDrum | null)?.construction ?? row.instrument_construction ?? 'fixture',
    diameterMm: row.diameter_mm, filmId: row.film_id, filmName: (row.film as { name: string } | null)?.name ?? row.film_name,
    target: row.target as HeadSpecView['target'], note: row.note, reachable: row.reachable, message: row.message,
    predicted: { tensionNPerM: predicted.tensionNPerM, fundamentalHz: predicted.fundamentalHz, shareOfYield: predicted.shareOfYield, modes: predicted.modes },
    price: row.price as HeadPrice | null, validUntil: row.price ? isoDay(quoteEnd(row).getTime()) : null, createdAt: row.created_at.toISOString(),
  }
}

/** A price holds for the days that its list names. */
export function quoteEnd(row: { created_at: Date, prices: unknown }): Date {
  return new Date(row.created_at.getTime() + (row.prices as { quoteDays?: number }).quoteDays! * DAY_MS)
}

function isoDay(ms: number): string {
  return new Date(ms).toISOString().slice(0, 10)
}
