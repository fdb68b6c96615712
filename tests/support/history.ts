// Readings as rows, for tests of lists, rights and files that need many of them and no sound.
import { randomUUID } from 'node:crypto'
import type { Person } from './stack'
import { database } from './stack'

export interface Drum { id: string, code: string, name: string, headId: string, recordingId: string }

interface DrumChanges { name?: string, code?: string, construction?: 'open' | 'kettle' | 'double-headed', customerId?: string | null, side?: 'batter' | 'resonant' }

/** An instrument with one head and one recording. */
export async function arrangeDrum(changes: DrumChanges = {}): Promise<Drum> {
  const db = database()
  const name = changes.name ?? `Tom ${randomUUID().slice(0, 8)}`
  const drum = await db.insertInto('instruments').values({
    name, construction: changes.construction ?? 'open', diameter_mm: 355.6, depth_mm: 203, bowl_volume_l: null, rod_count: 8, thread_pitch_mm: 1.058,
    hoop: null, note: null, customer_id: changes.customerId ?? null, created_by: null, ...(changes.code && { code: changes.code }),
  }).returning(['id', 'code']).executeTakeFirstOrThrow()
  const { id: headId } = await db.insertInto('heads').values({
    instrument_id: drum.id, side: changes.side ?? 'batter', film_id: null, material: 'pet', plies: 1, thickness_um: 250, density_kg_m3: 1390,
    modulus_gpa: 4.5, poisson: 0.38, yield_mpa: 100, areal_density_kg_m2: 0.3475, coating: null, kappa: null, kappa_variance: null,
  }).returning('id').executeTakeFirstOrThrow()
  const { id: recordingId } = await db.insertInto('recordings').values({
    head_id: headId, instrument_id: drum.id, uploaded_by: null, strike: 'centre', rod: null, first_rod: 1, centre_damped: false, temperature_c: 20, note: null,
    file_path: `${randomUUID()}.wav`, byte_count: 1, sha256: '0', duration_s: 3, sample_rate_hz: 48_000, channels: 1,
    refusal_code: null, refusal_message: null, sound: JSON.stringify({}), recorded_at: new Date(),
  }).returning('id').executeTakeFirstOrThrow()
  return { id: drum.id, code: drum.code, name, headId, recordingId }
}

export interface ReadingChanges { takenAt?: Date, tension?: number, hz?: number, evenness?: number | null, doubtful?: boolean, by?: Person, temperature?: number }

/** Readings of that drum, one for each entry, in one insert. */
export async function arrangeReadings(drum: Drum, entries: ReadingChanges[]): Promise<string[]> {
  const rows = await database().insertInto('readings').values(entries.map(entry => ({
    recording_id: drum.recordingId, head_id: drum.headId, instrument_id: drum.id, taken_at: entry.takenAt ?? new Date(), taken_by: entry.by?.id ?? null,
    strike: 'centre' as const, temperature_c: entry.temperature ?? 20, tension_n_per_m: entry.tension ?? 3000, u95_n_per_m: 60, repeatability_u95_n_per_m: 10,
    fundamental_hz: entry.hz ?? 140, evenness_percent: entry.evenness ?? null, confidence: 0.9, doubtful: entry.doubtful ?? false,
    detail: JSON.stringify({}), analysis_version: 'test',
  }))).returning('id').execute()
  return rows.map(row => row.id)
}
