import { airAt, createDrumModel, type DrumModel, type HeadFilm } from '../../shared/acoustics'
import { recordingFields } from '../../shared/schemas/reading'
import type { SignedInUser } from '../../shared/types/roles'
import type { Kysely } from 'kysely'
import type { DB } from '../database'
import type { AnalysisPool } from '../../server/utils/analysis/pool'
import type { AnalysedHead } from '../../server/utils/analysis/types'
import { getHeadContext, toAnalysedInstrument } from '../../server/utils/readings/headContext'
import type { RecordingFolders } from '../../server/utils/readings/files'
import { stageRecording, storeAnalysedRecording } from '../../server/utils/readings/store'
import { applyTurnSheet, createTurnSheet } from '../../server/utils/turns/sheets'
import { type Visit, visitsOf } from './calendar'
import type { DemoDrum } from './instruments'
import type { SeededRandom } from './random'
import { demoTapWav } from './taps'

export interface Bench { db: Kysely<DB>, folders: RecordingFolders, pool: AnalysisPool, makers: SignedInUser[], now: Date }

export interface HeadHistory { headId: string, drum: DemoDrum, wantedNPerM: number, otherNPerM?: number, visits: number }

/** Share of the energy that a film loses in one radian, by what it is made of (typical, from memory). */
const FILM_LOSS = { pet: 0.008, skin: 0.02, woven: 0.014, other: 0.012 } as const
/** Skins creep and follow the weather; PET holds (common practice, no source). */
const YEARLY_LOSS = { pet: 0.09, skin: 0.2, woven: 0.12, other: 0.1 } as const

/**
 * Plays two years of one head's visits: each a simulated tap that goes through the real analysis, turned where it had drifted.
 * @param given  these visits in place of two years of them
 * @returns how many readings were kept, and the last visit
 */
export async function playHistory(bench: Bench, history: HeadHistory, random: SeededRandom, given?: Visit[]): Promise<{ kept: number, last: Visit | undefined }> {
  const { db, makers, now } = bench
  const context = await getHeadContext(db, history.headId, makers[0]!)
  const { material } = context.head
  const scale = { axisymmetric: 1 + 0.02 * random.normal(), others: 1 + 0.01 * random.normal() }
  const visits = given ?? visitsOf({ now, wantedNPerM: history.wantedNPerM, visits: history.visits, yearlyLoss: YEARLY_LOSS[material] }, random)
  const instrument = toAnalysedInstrument(context)
  const models = new Map<number, DrumModel>()
  let kept = 0
  for (const visit of visits) {
    const maker = random.pick(makers)
    const model = models.get(visit.temperatureC) ?? createDrumModel({
      geometry: { construction: instrument.construction, radiusM: instrument.radiusM, depthM: instrument.depthM, bowlVolumeM3: instrument.bowlVolumeM3 },
      film: toFilm(instrument.heads[0]!), otherFilm: instrument.heads[1] && toFilm(instrument.heads[1]), air: airAt({ temperatureC: visit.temperatureC }),
    })
    models.set(visit.temperatureC, model)
    const wav = demoTapWav({
      model, tensionNPerM: visit.tensionNPerM, otherTensionNPerM: history.otherNPerM, airScale: scale, filmLoss: FILM_LOSS[material],
      radialPosition: history.drum.construction === 'kettle' ? random.between(0.7, 0.82) : random.between(0.42, 0.72), split: random.between(0, 0.006),
    }, random)
    const readingId = await takeReading(bench, history, visit, wav, maker)
    if (!readingId) continue
    kept++
    if (visit.retuned) await turn(bench, readingId, history.wantedNPerM, visit.at, maker)
  }
  return { kept, last: visits.at(-1) }
}

async function takeReading({ db, folders, pool }: Bench, { headId, drum }: HeadHistory, visit: Visit, wav: Uint8Array, maker: SignedInUser): Promise<string | undefined> {
  const context = await getHeadContext(db, headId, maker)
  const file = await stageRecording(folders, wav)
  const strike = drum.construction === 'kettle' ? 'edge' : 'centre'
  const outcome = await pool.analyse({
    wav, instrument: toAnalysedInstrument(context), side: context.head.side, strike, rod: strike === 'edge' ? 1 : undefined, firstRod: 1, centreDamped: false, temperatureC: visit.temperatureC,
  })
  if (!outcome.sound) throw new Error(`The demo wrote a file that cannot be read: ${outcome.kind === 'refused' ? outcome.refusal.message : ''}`)
  const stored = await storeAnalysedRecording(db, folders, {
    headId, file, sound: outcome.sound, by: maker.id, takenAt: visit.at, result: outcome,
    fields: recordingFields.parse({ strike, rod: strike === 'edge' ? 1 : undefined, centreDamped: false, temperatureC: visit.temperatureC, note: 'Simulated tap of the demo workshop' }),
  })
  return stored.reading?.id
}

async function turn({ db }: Bench, readingId: string, wantedNPerM: number, at: Date, maker: SignedInUser): Promise<void> {
  const sheet = await createTurnSheet(db, { readingId, target: { kind: 'tension', nPerM: wantedNPerM } }, maker, new Date(at.getTime() + 4 * 60_000))
  await applyTurnSheet(db, sheet.id, { rods: sheet.rods }, maker, new Date(at.getTime() + 9 * 60_000))
}

function toFilm(head: AnalysedHead): HeadFilm {
  return {
    plies: head.plies, plyThicknessM: head.plyThicknessM, filmDensityKgM3: head.filmDensityKgM3, modulusPa: head.modulusPa,
    poisson: head.poisson, yieldPa: head.yieldPa, arealDensityKgM2: head.arealDensityKgM2,
  }
}
