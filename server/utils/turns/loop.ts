import type { ReadingRow, TurnSheetRow } from '../../../db/readings.table'
import type { RodTurns } from '../../../shared/schemas/turnSheet'
import type { DB, Transaction } from '../core/db'
import { learnKappa } from './kappa'
import { idealRisePerTurn } from './rodKernel'
import { kappaOf, rodsOf } from './situation'

/**
 * Closes the head's open turn sheets with the reading that follows them, and learns from before, turns and after how far
 * the head's rods pull. A doubtful reading closes nothing: the next sound one will.
 *
 * The caller holds the head's row locked.
 */
export async function closeTurnSheets(trx: Transaction<DB>, reading: ReadingRow): Promise<void> {
  if (reading.doubtful) return
  const open = await trx.selectFrom('turn_sheets').selectAll()
    .where('head_id', '=', reading.head_id).where('applied_at', '<=', reading.taken_at).where('next_reading_id', 'is', null).execute()
  if (!open.length) return
  await trx.updateTable('turn_sheets').set({ next_reading_id: reading.id }).where('id', 'in', open.map(sheet => sheet.id)).execute()
  await learn(trx, open, reading)
}

async function learn(trx: Transaction<DB>, sheets: TurnSheetRow[], after: ReadingRow): Promise<void> {
  // Sheets from different readings were turned with something unheard between them.
  const beforeIds = new Set(sheets.map(sheet => sheet.reading_id))
  if (beforeIds.size !== 1) return
  const head = await trx.selectFrom('heads').selectAll().where('id', '=', after.head_id).executeTakeFirstOrThrow()
  const before = await trx.selectFrom('readings').selectAll().where('id', '=', sheets[0]!.reading_id).executeTakeFirstOrThrow()
  // Read with other figures, or on another film, it cannot be compared.
  if (before.doubtful || before.taken_at < head.film_since || before.created_at < head.figures_since) return
  const instrument = await trx.selectFrom('instruments').selectAll().where('id', '=', head.instrument_id).executeTakeFirstOrThrow()
  const turned = sheets.flatMap(sheet => sheet.applied as RodTurns[]).reduce((sum, rod) => sum + rod.turns, 0)
  const learned = learnKappa(kappaOf(head), {
    meanTurns: turned / instrument.rod_count,
    rodCount: instrument.rod_count,
    idealRisePerTurn: idealRisePerTurn(rodsOf({ instrument, head })),
    beforeNPerM: before.tension_n_per_m,
    afterNPerM: after.tension_n_per_m,
    differenceStandardNPerM: Math.hypot(before.repeatability_u95_n_per_m, after.repeatability_u95_n_per_m) / 2,
  })
  if (learned.passes === head.kappa_passes) return
  await trx.updateTable('heads').set({ kappa: learned.value, kappa_variance: learned.variance, kappa_passes: learned.passes }).where('id', '=', head.id).execute()
}
