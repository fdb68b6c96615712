import { randomUUID } from 'node:crypto'
import { type Kysely, Migrator, sql } from 'kysely'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type DB, openDatabase } from '../../db/database'
import { migrateToLatest } from '../../db/migrate'
import { migrations } from '../../db/migrations'
import { database, stack } from '../support/stack'

const name = `migration_${randomUUID().slice(0, 8)}`
const url = Object.assign(new URL(stack.databaseUrl), { pathname: `/${name}` }).href
let db: Kysely<DB>

beforeAll(async () => {
  await sql`create database ${sql.id(name)}`.execute(database())
  db = openDatabase(url, 1)
  const first = Object.fromEntries(Object.entries(migrations).slice(0, 1))
  const { error } = await new Migrator({ db, provider: { getMigrations: async () => first } }).migrateToLatest()
  if (error) throw error
  // A workshop of the first version: a drum whose film was changed, a recording with two readings of it, and one refused.
  await sql`
    insert into instruments (id, name, construction, diameter_mm, depth_mm, rod_count, thread_pitch_mm) values ('00000000-0000-4000-8000-000000000001', 'Old tom', 'open', 355, 200, 8, 1.058);
    insert into heads (id, instrument_id, side, material, plies, thickness_um, density_kg_m3, modulus_gpa, poisson, yield_mpa, areal_density_kg_m2, film_since)
      values ('00000000-0000-4000-8000-000000000002', '00000000-0000-4000-8000-000000000001', 'batter', 'pet', 1, 250, 1390, 4.5, 0.38, 100, 0.35, '2026-03-01');
    insert into recordings (id, head_id, instrument_id, strike, temperature_c, file_path, byte_count, sha256, duration_s, sample_rate_hz, channels, sound, refusal_code, recorded_at, created_at)
      select ('00000000-0000-4000-8000-00000000001' || n)::uuid, '00000000-0000-4000-8000-000000000002', '00000000-0000-4000-8000-000000000001', 'centre', 20, 'none', 1, '', 1, 48000, 1, '{}',
        case n when 2 then 'silent' end, ('2026-04-0' || n || 'T12:00Z')::timestamptz, ('2026-04-0' || n || 'T12:00Z')::timestamptz from generate_series(1, 2) n;
    insert into readings (recording_id, head_id, instrument_id, strike, temperature_c, tension_n_per_m, u95_n_per_m, repeatability_u95_n_per_m, fundamental_hz, confidence, doubtful, detail, analysis_version, created_at)
      values ('00000000-0000-4000-8000-000000000011', '00000000-0000-4000-8000-000000000002', '00000000-0000-4000-8000-000000000001', 'centre', 20, 3000, 60, 10, 140, 0.9, false, '{}', '1.0.0', '2026-04-01T12:00Z');
  `.execute(db)
})

afterAll(async () => {
  await db.destroy()
  await sql`drop database ${sql.id(name)} with (force)`.execute(database())
})

describe('a database of an earlier version with data in it', () => {
  it('comes to the newest schema with its readings as the newest, its recordings dated, and its films as old as they were', async () => {
    expect(await migrateToLatest(url)).toEqual(Object.keys(migrations).slice(1))
    const recordings = await db.selectFrom('recordings').select(['analysis_version', 'analysed_at', 'refusal_code']).orderBy('recorded_at').execute()
    expect(recordings).toMatchObject([{ analysis_version: '1.0.0', refusal_code: null }, { analysis_version: null, refusal_code: 'silent' }])
    expect(recordings.map(row => row.analysed_at.toISOString().slice(0, 10))).toEqual(['2026-04-01', '2026-04-02'])
    expect(await db.selectFrom('readings').select(['superseded_at', 'calibration_id', 'tension_n_per_m']).execute()).toEqual([{ superseded_at: null, calibration_id: null, tension_n_per_m: 3000 }])
    const head = await db.selectFrom('heads').select(['film_since', 'figures_since', 'areal_density_u95_kg_m2', 'weighing']).executeTakeFirstOrThrow()
    expect(head.figures_since).toEqual(head.film_since)
    expect(head).toMatchObject({ areal_density_u95_kg_m2: null, weighing: null })
  })

  it('has nothing left to do the second time', async () => {
    expect(await migrateToLatest(url)).toEqual([])
  })
})
