// What tests of the bench bring along: an instrument, taps of the simulated drum, uploads.
import { existsSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import type { InstrumentInput, InstrumentView } from '../../shared/schemas/instrument'
import type { RecordingAnswer } from '../../shared/schemas/reading'
import type { AnalysedReading } from '../../shared/types/reading'
import { type SimTap, simulateTap, writeWav16 } from './drum'
import { type Answer, type Client, database, stack } from './stack'

export const clearFilm = { material: 'pet', plies: 1, thicknessUm: 250, densityKgM3: 1390, modulusGPa: 4.5, poisson: 0.38, yieldMPa: 100 } as const

/** A 13 in head on the workshop's proof fixture. */
export const fixtureBody = {
  name: '13 in proof head', construction: 'fixture', diameterMm: 330.2, depthMm: 0, bowlVolumeL: null, rodCount: 8, threadPitchMm: 1.058, customerId: null,
  heads: [{ side: 'batter', film: clearFilm, arealDensityKgM2: 0.3475 }],
} satisfies InstrumentInput

export async function createInstrument(client: Client, changes: Partial<InstrumentInput> = {}): Promise<InstrumentView & { headId: string }> {
  const { status, body } = await client.post<InstrumentView>('/api/instruments', { ...fixtureBody, ...changes })
  if (status !== 201) throw new Error(`Registering an instrument gave ${status}: ${JSON.stringify(body)}`)
  return { ...body, headId: body.heads[0]!.id }
}

interface TapChanges { strike?: Partial<SimTap['strike']>, recording?: Partial<SimTap['recording']> }

function fixtureSpec(tensionNPerM: number, seed: number, strike: Partial<SimTap['strike']> = {}, recording: Partial<SimTap['recording']> = {}): SimTap {
  return {
    drum: {
      construction: 'fixture', radiusM: 0.1651, depthM: 0,
      batter: { tensionNPerM, plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: 0.3475 },
    },
    strike: { radiusRatio: 0.75, angleRad: 0.3, ...strike },
    microphone: { radiusRatio: 0.5, angleRad: 0.6, heightM: 0.1 },
    recording: { seed, snrDb: 30, ringS: 1.5, ...recording },
  }
}

/** A soft edge tap on the fixture's head at this tension: 30 dB over the noise. */
export function fixtureTap(tensionNPerM: number, seed = 1, changes: TapChanges = {}): Uint8Array<ArrayBuffer> {
  const { samples, sampleRateHz } = simulateTap(fixtureSpec(tensionNPerM, seed, changes.strike, changes.recording))
  return new Uint8Array(writeWav16(samples, sampleRateHz))
}

/** 16-bit mono WAV of what a function of time says, -1 to 1. */
export function soundWav(durationS: number, at: (t: number) => number, sampleRateHz = 48000): Uint8Array<ArrayBuffer> {
  return new Uint8Array(writeWav16(Float64Array.from({ length: Math.round(durationS * sampleRateHz) }, (_, i) => at(i / sampleRateHz)), sampleRateHz))
}

export type UploadAnswer = RecordingAnswer & { statusCode?: number, message?: string, data?: { issues?: { path: string, message: string }[] } }

export function uploadForm(bytes: Uint8Array<ArrayBuffer> | null, fields: Record<string, string> = {}, name = 'tap.wav'): FormData {
  const form = new FormData()
  for (const [key, value] of Object.entries(fields)) form.append(key, value)
  if (bytes) form.append('file', new Blob([bytes], { type: 'audio/wav' }), name)
  return form
}

export function uploadRecording(client: Client, headId: string, bytes: Uint8Array<ArrayBuffer>, fields: Record<string, string> = {}): Promise<Answer<UploadAnswer>> {
  return client.send<UploadAnswer>('POST', `/api/heads/${headId}/recordings`, uploadForm(bytes, { strike: 'edge', centreDamped: 'false', ...fields }))
}

/** Fundamental of the fixture's head by the simulated drum, Hz. */
export function fixtureFundamentalHz(tensionNPerM: number): number {
  return simulateTap(fixtureSpec(tensionNPerM, 1, {}, { ringS: 0.6 })).truth.fundamentalHz
}

/** A reading put straight into the database, where a test is about what follows from it. */
export async function arrangeReading(headId: string, instrumentId: string, tensionNPerM: number, changes: { doubtful?: boolean, takenAt?: Date, deviationsPercent?: number[] } = {}): Promise<string> {
  const takenAt = changes.takenAt ?? new Date()
  const sound = { durationS: 2, sampleRateHz: 48000, channels: 1, bitDepth: '16', peakDbfs: -6, waveform: { columns: 1, minMax: [-1, 1] }, spectrum: null }
  const { id: recordingId } = await database().insertInto('recordings').values({
    head_id: headId, instrument_id: instrumentId, uploaded_by: null, strike: 'edge', rod: null, temperature_c: 20, note: null, file_path: 'none', byte_count: 0, sha256: '',
    duration_s: 2, sample_rate_hz: 48000, channels: 1, refusal_code: null, refusal_message: null, sound: JSON.stringify(sound), recorded_at: takenAt, first_rod: 1, centre_damped: false,
  }).returning('id').executeTakeFirstOrThrow()
  const rods = changes.deviationsPercent?.map((deviationPercent, i) => ({ rod: i + 1, nPerM: tensionNPerM * (1 + deviationPercent / 100), u95NPerM: 10, deviationPercent }))
  const tension = { nPerM: tensionNPerM, u95NPerM: 0.02 * tensionNPerM, repeatabilityU95NPerM: 0.004 * tensionNPerM }
  const fundamentalHz = fixtureFundamentalHz(tensionNPerM)
  const detail: AnalysedReading = {
    analysisVersion: 'test', tension, fundamentalHz, confidence: 0.99, doubtful: changes.doubtful ?? false, modes: [], unexplained: [], taps: [{ atS: 0.3, rod: null }],
    rim: rods ? { evennessPercent: (Math.max(...changes.deviationsPercent!) - Math.min(...changes.deviationsPercent!)) / 2, rods } : null, budget: [], runnerUp: null, warnings: [],
  }
  const { id } = await database().insertInto('readings').values({
    recording_id: recordingId, head_id: headId, instrument_id: instrumentId, taken_at: takenAt, taken_by: null, strike: 'edge', temperature_c: 20,
    tension_n_per_m: tension.nPerM, u95_n_per_m: tension.u95NPerM, repeatability_u95_n_per_m: tension.repeatabilityU95NPerM, fundamental_hz: fundamentalHz,
    evenness_percent: detail.rim?.evennessPercent ?? null, confidence: 0.99, doubtful: detail.doubtful, detail: JSON.stringify(detail), analysis_version: 'test',
  }).returning('id').executeTakeFirstOrThrow()
  return id
}

/** Rows of one head and all files that the server keeps: what must not change when nothing is stored. */
export async function kept(headId: string) {
  const rows = await database().selectFrom('recordings').select('id').where('head_id', '=', headId).execute()
  const readings = await database().selectFrom('readings').select('id').where('head_id', '=', headId).execute()
  const list = (folder: string) => existsSync(join(stack.dataDir, folder)) ? readdirSync(join(stack.dataDir, folder), { recursive: true, withFileTypes: true }).filter(entry => entry.isFile()).length : 0
  return { rows: rows.length, readings: readings.length, files: list('recordings'), unfinished: list('tmp') }
}
