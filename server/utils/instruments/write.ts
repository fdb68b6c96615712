import type { HeadPatchBody, InstrumentBody, InstrumentPatchBody, InstrumentView } from '../../../shared/schemas/instrument'
import type { SignedInUser } from '../../../shared/types/roles'
import type { InstrumentRow } from '../../../db/instruments.table'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError, notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { visibleTo } from './access'
import { getInstrument } from './find'

type Actor = Pick<SignedInUser, 'id' | 'role'>
type HeadInput = InstrumentBody['heads'][number]

/** What the rods do to the film changes with any of these. */
const ROD_FIELDS = ['diameterMm', 'rodCount', 'threadPitchMm'] as const

/** A customer's instrument is always the customer's own. @param at when it was registered (the demo places it in the past) */
export async function createInstrument(db: Kysely<DB>, body: InstrumentBody, by: Actor, at = new Date()): Promise<InstrumentView> {
  const id = await db.transaction().execute(async (trx) => {
    const customerId = by.role === 'customer' ? by.id : body.customerId ?? null
    await requireCustomer(trx, customerId)
    const row = await trx.insertInto('instruments').values({
      name: body.name, construction: body.construction, diameter_mm: body.diameterMm, depth_mm: body.depthMm, bowl_volume_l: body.bowlVolumeL ?? null,
      rod_count: body.rodCount, thread_pitch_mm: body.threadPitchMm, hoop: body.hoop || null, note: body.note || null,
      customer_id: customerId, created_by: by.id, created_at: at, updated_at: at,
    }).returning('id').executeTakeFirstOrThrow()
    for (const [index, head] of body.heads.entries()) {
      await requireFilm(trx, head.filmId, `heads.${index}.filmId`)
      await trx.insertInto('heads').values({ instrument_id: row.id, side: head.side, ...filmColumns(head), kappa: null, kappa_variance: null, film_since: at, created_at: at }).execute()
    }
    await recordAudit(trx, { actor: by.id, action: 'instrument-created', subjectType: 'instrument', subjectId: row.id, detail: { name: body.name } })
    return row.id
  })
  return getInstrument(db, id, by)
}

function filmColumns(head: Omit<HeadInput, 'side'>) {
  const { film } = head
  return {
    film_id: head.filmId || null, material: film.material, plies: film.plies, thickness_um: film.thicknessUm, density_kg_m3: film.densityKgM3,
    modulus_gpa: film.modulusGPa, poisson: film.poisson, yield_mpa: film.yieldMPa, coating: head.coating || null,
    areal_density_kg_m2: head.arealDensityKgM2 ?? film.plies * film.thicknessUm * 1e-6 * film.densityKgM3,
  }
}

async function requireCustomer(trx: Transaction<DB>, id: string | null): Promise<void> {
  if (id === null) return
  const customer = await trx.selectFrom('users').select('id').where('id', '=', id).where('role', '=', 'customer').executeTakeFirst()
  if (!customer) throw new DomainError('bad-input', 'Choose the owner from the customers.', [{ path: 'customerId', message: 'This is not a customer of the workshop.' }])
}

async function requireFilm(trx: Transaction<DB>, id: string | null | undefined, path: string): Promise<void> {
  if (!id) return
  const film = await trx.selectFrom('films').select('id').where('id', '=', id).executeTakeFirst()
  if (!film) throw new DomainError('bad-input', 'Choose the film from the catalogue, or leave it out and give its figures.', [{ path, message: 'The catalogue has no such film.' }])
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
      name: patch.name, diameter_mm: patch.diameterMm, depth_mm: patch.depthMm, bowl_volume_l: patch.bowlVolumeL, rod_count: patch.rodCount,
      thread_pitch_mm: patch.threadPitchMm, hoop: patch.hoop, note: patch.note, customer_id: customerId, updated_at: new Date(),
    }).where('id', '=', id).execute()
    if (ROD_FIELDS.some(field => patch[field] !== undefined && patch[field] !== rodField(now, field))) {
      await trx.updateTable('heads').set({ ...forgotten(), film_since: new Date() }).where('instrument_id', '=', id).execute()
    }
    await recordAudit(trx, { actor: by.id, action: 'instrument-changed', subjectType: 'instrument', subjectId: id, detail: { fields: Object.keys(patch) } })
  })
  return getInstrument(db, id, by)
}

const rodField = (row: InstrumentRow, field: typeof ROD_FIELDS[number]) => ({ diameterMm: row.diameter_mm, rodCount: row.rod_count, threadPitchMm: row.thread_pitch_mm })[field]
const forgotten = () => ({ kappa: null, kappa_variance: null, kappa_passes: 0 })

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

/** A new film: readings before it teach nothing of how its rods pull. */
export async function changeHeadFilm(db: Kysely<DB>, headId: string, body: HeadPatchBody, by: Actor): Promise<InstrumentView> {
  const instrumentId = await db.transaction().execute(async (trx) => {
    const head = await trx.selectFrom('heads').innerJoin('instruments', 'instruments.id', 'heads.instrument_id')
      .select(['heads.id', 'heads.instrument_id']).where('heads.id', '=', headId).where(visibleTo(by)).forUpdate('heads').executeTakeFirst()
    if (!head) throw notFound('This head')
    await requireFilm(trx, body.filmId, 'filmId')
    await trx.updateTable('heads').set({ ...filmColumns(body), ...forgotten(), film_since: new Date() }).where('id', '=', headId).execute()
    await recordAudit(trx, { actor: by.id, action: 'head-film-changed', subjectType: 'head', subjectId: headId, detail: { filmId: body.filmId ?? null, material: body.film.material } })
    return head.instrument_id
  })
  return getInstrument(db, instrumentId, by)
}
