import type { InstrumentBody, InstrumentPatchBody, InstrumentView } from '../../../shared/schemas/instrument'
import type { SignedInUser } from '../../../shared/types/roles'
import type { InstrumentRow } from '../../../db/instruments.table'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { visibleTo } from './access'
import { endCalibrations } from './calibrations'
import { filmColumns, nothingLearned, requireCatalogueFilm } from './films'
import { getInstrument } from './find'

type Actor = Pick<SignedInUser, 'id' | 'role'>

/** What the rods do to the film changes with any of these. */
const ROD_FIELDS = ['diameterMm', 'rodCount', 'threadPitchMm'] as const
/** Readings rest on these; a calibration made with other ones holds no longer. */
const READ_FIELDS = ['diameterMm', 'diameterU95Mm', 'depthMm', 'bowlVolumeL'] as const

/** A customer's instrument is always the customer's own. @param at when it was registered (the demo places it in the past) */
export async function createInstrument(db: Kysely<DB>, body: InstrumentBody, by: Actor, at = new Date()): Promise<InstrumentView> {
  const id = await db.transaction().execute(async (trx) => {
    const customerId = by.role === 'customer' ? by.id : body.customerId ?? null
    await requireCustomer(trx, customerId)
    const row = await trx.insertInto('instruments').values({
      name: body.name, construction: body.construction, diameter_mm: body.diameterMm, diameter_u95_mm: body.diameterU95Mm ?? null, depth_mm: body.depthMm, bowl_volume_l: body.bowlVolumeL ?? null,
      rod_count: body.rodCount, thread_pitch_mm: body.threadPitchMm, hoop: body.hoop || null, note: body.note || null,
      customer_id: customerId, created_by: by.id, created_at: at, updated_at: at,
    }).returning('id').executeTakeFirstOrThrow()
    for (const [index, head] of body.heads.entries()) {
      await requireCatalogueFilm(trx, head.filmId, `heads.${index}.filmId`)
      await trx.insertInto('heads').values({ instrument_id: row.id, side: head.side, ...filmColumns(head), kappa: null, kappa_variance: null, film_since: at, figures_since: at, created_at: at }).execute()
    }
    await recordAudit(trx, { actor: by.id, action: 'instrument-created', subjectType: 'instrument', subjectId: row.id, detail: { name: body.name } })
    return row.id
  })
  return getInstrument(db, id, by)
}

async function requireCustomer(trx: Transaction<DB>, id: string | null): Promise<void> {
  if (id === null) return
  const customer = await trx.selectFrom('users').select('id').where('id', '=', id).where('role', '=', 'customer').executeTakeFirst()
  if (!customer) throw new DomainError('bad-input', 'Choose the owner from the customers.', [{ path: 'customerId', message: 'This is not a customer of the workshop.' }])
}

async function lockInstrument(trx: Transaction<DB>, id: string, by: Actor): Promise<InstrumentRow> {
  const row = await trx.selectFrom('instruments').selectAll().where('id', '=', id).where(visibleTo(by)).forUpdate().executeTakeFirst()
  if (!row) throw notFound('This instrument')
  return row
}

export async function patchInstrument(db: Kysely<DB>, id: string, patch: InstrumentPatchBody, by: Actor): Promise<InstrumentView> {
  await db.transaction().execute(async (trx) => {
    const now = await lockInstrument(trx, id, by)
    // A customer cannot give an instrument away.
    const customerId = by.role === 'customer' || patch.customerId === undefined ? now.customer_id : patch.customerId
    if (customerId !== now.customer_id) await requireCustomer(trx, customerId)
    requireWhole(now, patch)
    await trx.updateTable('instruments').set({
      name: patch.name, diameter_mm: patch.diameterMm, diameter_u95_mm: patch.diameterU95Mm, depth_mm: patch.depthMm, bowl_volume_l: patch.bowlVolumeL, rod_count: patch.rodCount,
      thread_pitch_mm: patch.threadPitchMm, hoop: patch.hoop, note: patch.note, customer_id: customerId, updated_at: new Date(),
    }).where('id', '=', id).execute()
    const changed = (field: keyof typeof columns) => patch[field] !== undefined && patch[field] !== now[columns[field]]
    const at = new Date()
    if (ROD_FIELDS.some(changed)) await trx.updateTable('heads').set({ ...nothingLearned(), figures_since: at }).where('instrument_id', '=', id).execute()
    if (READ_FIELDS.some(changed)) {
      const heads = await trx.updateTable('heads').set({ figures_since: at }).where('instrument_id', '=', id).returning('id').execute()
      await endCalibrations(trx, heads.map(head => head.id), { by: by.id, because: 'the instrument\'s size was changed', at })
    }
    await recordAudit(trx, { actor: by.id, action: 'instrument-changed', subjectType: 'instrument', subjectId: id, detail: { fields: Object.keys(patch) } })
  })
  return getInstrument(db, id, by)
}

const columns = {
  diameterMm: 'diameter_mm', diameterU95Mm: 'diameter_u95_mm', depthMm: 'depth_mm', bowlVolumeL: 'bowl_volume_l', rodCount: 'rod_count', threadPitchMm: 'thread_pitch_mm',
} as const

/** What instrumentBody asks of a whole instrument must hold after a change of a part, too. */
function requireWhole(now: InstrumentRow, patch: InstrumentPatchBody): void {
  const refuse = (path: string, message: string) => {
    throw new DomainError('bad-input', message, [{ path, message }])
  }
  const volume = patch.bowlVolumeL === undefined ? now.bowl_volume_l : patch.bowlVolumeL
  if (now.construction === 'kettle' && !volume) refuse('bowlVolumeL', 'A kettle needs its bowl volume in litres.')
  const deep = now.construction === 'open' || now.construction === 'double-headed'
  if (deep && (patch.depthMm ?? now.depth_mm) <= 0) refuse('depthMm', 'This construction needs a shell depth.')
}

/** The same instrument again under a new number, without readings and without what was learned of its rods. */
export async function duplicateInstrument(db: Kysely<DB>, id: string, by: Actor): Promise<InstrumentView> {
  const source = await getInstrument(db, id, by)
  const name = `${source.name.slice(0, 113)} (copy)`
  return createInstrument(db, { ...source, name, heads: source.heads }, by)
}
