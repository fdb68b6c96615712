import argon2 from 'argon2'
import { type Kysely, sql } from 'kysely'
import type { InstrumentBody, InstrumentView } from '../../shared/schemas/instrument'
import type { SignedInUser } from '../../shared/types/roles'
import { createInstrument } from '../../server/utils/instruments/write'
import { SHOWCASE_READING } from '../../server/utils/readings/showcase'
import type { DB } from '../database'
import type { FilmRow } from '../instruments.table'
import { ensureFilms } from './films'
import { type DemoDrum, demoDrums } from './instruments'
import { DEMO_PASSWORD, demoPeople } from './people'
import { seededRandom } from './random'
import type { Visit } from './calendar'
import { type Bench, type HeadHistory, playHistory } from './readings'

/** Rows of `settings` that say how far the demo has come. */
export const DEMO_STARTED = 'demo-started'
export const DEMO_LOADED = 'demo-loaded'

interface DrumHistory { batter: HeadHistory, resonant?: HeadHistory }

/** Heads played at once: enough to keep two analysis threads busy. */
const LANES = 3

export async function seedPeople(db: Kysely<DB>): Promise<Map<string, SignedInUser>> {
  const passwordHash = await argon2.hash(DEMO_PASSWORD, { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 })
  const people = new Map<string, SignedInUser>()
  for (const { key, name, email, role } of demoPeople) {
    const { id } = await db.insertInto('users').values({ name, email, role, password_hash: passwordHash, email_confirmed_at: new Date(), deactivated_at: null }).returning('id').executeTakeFirstOrThrow()
    people.set(key, { id, name, email, role })
  }
  return people
}

/** The demo's drums with their two years of readings. */
export async function seedBench(bench: Bench, people: Map<string, SignedInUser>): Promise<{ instruments: number, readings: number }> {
  await ensureFilms(bench.db)
  const films = new Map((await bench.db.selectFrom('films').selectAll().execute()).map(film => [film.id, film]))
  const histories: (DrumHistory & { seed: number })[] = []
  for (const [index, drum] of demoDrums.entries()) {
    const view = await createInstrument(bench.db, toBody(drum, films, people), bench.makers[0]!, new Date(bench.now.getTime() - 735 * 24 * 3600_000))
    histories.push({ ...drumHistory(drum, view), seed: 1000 + 10 * index })
  }
  let readings = 0
  const queue = [...histories]
  await Promise.all(Array.from({ length: LANES }, async () => {
    for (let next = queue.shift(); next; next = queue.shift()) {
      const { kept, last } = await playHistory(bench, next.batter, seededRandom(next.seed))
      readings += kept
      if (next.resonant && last) readings += await sameSitting(bench, next.resonant, last, next.seed + 1)
    }
  }))
  await chooseShowcase(bench.db)
  return { instruments: demoDrums.length, readings }
}

/** Two heads cost the analysis ten times what one does, and the demo is to stand within a minute: fewer visits for them. */
function drumHistory(drum: DemoDrum, view: InstrumentView): DrumHistory {
  const head = (side: 'batter' | 'resonant') => view.heads.find(candidate => candidate.side === side)!.id
  const batter: HeadHistory = { headId: head('batter'), drum, wantedNPerM: drum.tensionNPerM, otherNPerM: drum.resonant?.tensionNPerM, visits: drum.resonant ? 2 : drum.owner ? 4 : 2 }
  return { batter, resonant: drum.resonant && { headId: head('resonant'), drum, wantedNPerM: drum.resonant.tensionNPerM, visits: 1 } }
}

/** The resonant head is tapped minutes before the batter's last visit, so that both can be read together. */
async function sameSitting(bench: Bench, history: HeadHistory, batter: Visit, seed: number): Promise<number> {
  const visit = { at: new Date(batter.at.getTime() - 3 * 60_000), tensionNPerM: history.wantedNPerM, temperatureC: batter.temperatureC, retuned: false }
  return (await playHistory(bench, { ...history, otherNPerM: batter.tensionNPerM }, seededRandom(seed), [visit])).kept
}

function toBody(drum: DemoDrum, films: Map<string, FilmRow>, people: Map<string, SignedInUser>): InstrumentBody {
  const head = (side: 'batter' | 'resonant', filmId: string): InstrumentBody['heads'][number] => {
    const film = films.get(filmId)
    if (!film) throw new Error(`The catalogue has no film ${filmId}.`)
    return {
      side, filmId, coating: film.coating, arealDensityKgM2: film.areal_density_kg_m2,
      film: { material: film.material, plies: film.plies, thicknessUm: film.thickness_um, densityKgM3: film.density_kg_m3, modulusGPa: film.modulus_gpa, poisson: film.poisson, yieldMPa: film.yield_mpa },
    }
  }
  return {
    name: drum.name, construction: drum.construction, diameterMm: drum.diameterMm, depthMm: drum.depthMm, bowlVolumeL: drum.bowlVolumeL ?? null,
    rodCount: drum.rods, threadPitchMm: 1.058, hoop: drum.hoop, note: 'Invented for the demo.', customerId: drum.owner ? people.get(drum.owner)!.id : null,
    heads: [head('batter', drum.film), ...(drum.resonant ? [head('resonant', drum.resonant.film)] : [])],
  }
}

/** A sure reading of a single-headed drum with many modes named: what a visitor can play with. */
async function chooseShowcase(db: Kysely<DB>): Promise<void> {
  const reading = await db.selectFrom('readings').innerJoin('instruments', 'instruments.id', 'readings.instrument_id').select('readings.id')
    .where('instruments.name', '=', '14 in floor tom, ash shell').where('readings.doubtful', '=', false)
    .orderBy(sql`jsonb_array_length(readings.detail->'modes')`, 'desc').orderBy('readings.taken_at', 'desc').limit(1).executeTakeFirst()
  if (reading) await setSetting(db, SHOWCASE_READING, reading.id)
}

export async function setSetting(db: Kysely<DB>, key: string, value: unknown): Promise<void> {
  await db.insertInto('settings').values({ key, value: JSON.stringify(value) }).onConflict(conflict => conflict.column('key').doUpdateSet({ value: JSON.stringify(value) })).execute()
}
