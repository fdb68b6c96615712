import { z } from 'zod'
import { idSchema, limitSchema, noteSchema, numeric } from './common'
import type { AnalysedReading, Refusal, SoundFacts } from '../types/reading'

export const strikeSchema = z.enum(['centre', 'edge', 'round'], 'strike is centre, edge or round.')

const flag = z.union([z.boolean(), z.enum(['true', 'false', '1', '0']).transform(text => text === 'true' || text === '1')])
const rodNumber = numeric('A rod is a whole number.').pipe(z.number().int('A rod is a whole number.').min(1, 'Rods count from 1.').max(24, 'A head has at most 24 rods.'))

/** The text fields that travel with an uploaded recording. */
export const recordingFields = z.object({
  strike: strikeSchema,
  rod: rodNumber.optional(),
  firstRod: rodNumber.default(1),
  centreDamped: flag.optional(),
  /** From an unheated shed to a hot stage. */
  temperatureC: numeric('Temperature is a number in °C.').pipe(z.number().min(-10, 'Temperature is at least -10 °C.').max(50, 'Temperature is at most 50 °C.')).default(20),
  note: noteSchema.optional(),
  privateToMaker: flag.default(false),
})
export type RecordingFields = z.infer<typeof recordingFields>

/** 50 MB: two minutes of 96 kHz stereo at 16 bit, with room. */
export const MAX_UPLOAD_BYTES = 50 * 1024 * 1024

export const readingSorts = ['takenAt', 'tension', 'fundamental', 'evenness', 'instrument', 'owner'] as const

export const readingsQuery = z.object({
  limit: limitSchema.default(50),
  page: numeric('page is a whole number.').pipe(z.number().int().min(1)).optional(),
  cursor: z.string().max(400).optional(),
  /** A field of readingSorts, with - in front for descending. */
  sort: z.string().regex(new RegExp(`^-?(${readingSorts.join('|')})$`), `sort is one of ${readingSorts.join(', ')}, with - in front for descending.`).default('-takenAt'),
  q: z.string().trim().max(100).optional(),
  instrumentId: idSchema.optional(),
  headId: idSchema.optional(),
  customerId: idSchema.optional(),
  takenBy: idSchema.optional(),
  construction: z.enum(['open', 'frame', 'double-headed', 'kettle', 'fixture']).optional(),
  side: z.enum(['batter', 'resonant']).optional(),
  doubtful: flag.optional(),
  from: z.iso.date('Write the date as 2026-12-01.').optional(),
  to: z.iso.date('Write the date as 2026-12-01.').optional(),
  minTension: numeric('Tension is a number in N/m.').optional(),
  maxTension: numeric('Tension is a number in N/m.').optional(),
  minHz: numeric('Pitch is a number in Hz.').optional(),
  maxHz: numeric('Pitch is a number in Hz.').optional(),
})
export type ReadingsQuery = z.infer<typeof readingsQuery>

export interface RecordingView {
  id: string
  headId: string
  instrumentId: string
  strike: z.infer<typeof strikeSchema>
  rod: number | null
  firstRod: number
  centreDamped: boolean
  temperatureC: number
  note: string | null
  privateToMaker: boolean
  recordedAt: string
  byteCount: number
  sound: SoundFacts
  refusal: Refusal | null
}

/** What a later version said of a recording that an earlier one had read. */
export interface RereadRefusal extends Refusal { version: string }

/** Another reading of the same recording. */
export interface ReadingVersionView {
  id: string
  analysisVersion: string
  /** When it was read, not when the tap was. */
  readAt: string
  tension: { nPerM: number, u95NPerM: number }
  fundamentalHz: number
  doubtful: boolean
  newest: boolean
}

/** One reading, whole. */
export interface ReadingView extends AnalysedReading {
  id: string
  headId: string
  instrumentId: string
  takenAt: string
  strike: z.infer<typeof strikeSchema>
  /** Null where the head has had a new film since. */
  filmStress: { mPa: number, shareOfYield: number } | null
  makerName: string | null
  /** When it was read, not when the tap was. */
  readAt: string
  /** False for a reading that a newer one of the same recording stands before. */
  newest: boolean
  /** The other readings of this recording, newest first. */
  versions: ReadingVersionView[]
  /** Why reading again would give another figure; null for what is up to date, and for readings that are not the newest. */
  outdated: 'version' | 'figures' | null
  rereadRefusal: RereadRefusal | null
  /** The calibration that it was read with. */
  calibration: { kind: 'known' | 'reading', at: string, knownNPerM: number, knownU95NPerM: number } | null
  /** Newest reading of both heads together that this recording is part of. */
  togetherId: string | null
  sound: SoundFacts
  /** `audible`: the person asking may play it. */
  recording: { id: string, note: string | null, strike: z.infer<typeof strikeSchema>, rod: number | null, firstRod: number, centreDamped: boolean, temperatureC: number, audible: boolean }
  head: { id: string, side: 'batter' | 'resonant', filmId: string | null, coating: string | null }
  instrument: { id: string, code: string, name: string, construction: string, diameterMm: number, rodCount: number }
}

/** A file that could not be read at all: nothing of it was stored. */
export interface UnreadRecordingView { id: null, headId: string, instrumentId: string, refusal: Refusal }

/** The answer to an uploaded recording: 201 with a reading, 422 with a refusal and no reading. */
export interface RecordingAnswer { recording: RecordingView | UnreadRecordingView, reading: ReadingView | null }

/** One row of the instrument history table. */
export interface ReadingRowView {
  id: string
  takenAt: string
  instrumentId: string
  instrumentCode: string
  instrumentName: string
  construction: string
  ownerId: string | null
  ownerName: string | null
  headId: string
  side: 'batter' | 'resonant'
  strike: 'centre' | 'edge' | 'round'
  tension: { nPerM: number, u95NPerM: number }
  fundamentalHz: number
  evennessPercent: number | null
  temperatureC: number
  confidence: number
  doubtful: boolean
  makerName: string | null
}

/** `total` where counting is quick, else `approximateTotal`. `position`: place of the first item in the whole list, from 1; 0 when empty. */
export interface ReadingsPage {
  items: ReadingRowView[]
  total?: number
  approximateTotal?: number
  position: number
  next: string | null
  previous: string | null
}
