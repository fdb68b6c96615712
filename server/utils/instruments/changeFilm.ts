import type { HeadPatchBody, InstrumentView } from '../../../shared/schemas/instrument'
import type { SignedInUser } from '../../../shared/types/roles'
import type { HeadRow } from '../../../db/instruments.table'
import type { DB, Kysely, Transaction } from '../core/db'
import { notFound } from '../core/errors'
import { recordAudit } from '../people/audit'
import { visibleTo } from './access'
import { endCalibrations, findCalibration, moveCalibrationToNewFilm } from './calibrations'
import { filmColumns, nothingLearned, requireCatalogueFilm } from './films'
import { getInstrument } from './find'

/**
 * Another film on a head, or better figures of the same one.
 *
 * A new film keeps the figures of the old one beside it, so that the old one's recordings can still be read; its rods are
 * learned anew, and of a calibration only the air's scale stays. Better figures of the same film let its recordings be
 * read again, and end a calibration that rested on the worse ones.
 * @throws DomainError not-found, bad-input
 */
export async function changeHeadFilm(db: Kysely<DB>, headId: string, body: HeadPatchBody, by: Pick<SignedInUser, 'id' | 'role'>): Promise<InstrumentView> {
  const instrumentId = await db.transaction().execute(async (trx) => {
    const head = await trx.selectFrom('heads').innerJoin('instruments', 'instruments.id', 'heads.instrument_id')
      .selectAll('heads').where('heads.id', '=', headId).where(visibleTo(by)).forUpdate('heads').executeTakeFirst()
    if (!head) throw notFound('This head')
    await requireCatalogueFilm(trx, body.filmId, 'filmId')
    const film = filmColumns(body)
    const at = new Date()
    if (body.sameFilm) await correctFilm(trx, head, film, by.id, at)
    else await mountFilm(trx, head, film, by.id, at)
    await recordAudit(trx, { actor: by.id, action: body.sameFilm ? 'head-figures-corrected' : 'head-film-changed', subjectType: 'head', subjectId: headId, detail: { filmId: body.filmId ?? null, material: body.film.material } })
    return head.instrument_id
  })
  return getInstrument(db, instrumentId, by)
}

type FilmColumns = ReturnType<typeof filmColumns>

async function mountFilm(trx: Transaction<DB>, head: HeadRow, film: FilmColumns, by: string, at: Date): Promise<void> {
  const calibration = await findCalibration(trx, head.id)
  await trx.insertInto('earlier_films').values({ head_id: head.id, mounted_at: head.film_since, removed_at: at, figures: JSON.stringify({ ...figuresOf(head), calibrationId: calibration?.id ?? null }) }).execute()
  await trx.updateTable('heads').set({ ...film, ...nothingLearned(), film_since: at, figures_since: at }).where('id', '=', head.id).execute()
  if (calibration) await moveCalibrationToNewFilm(trx, calibration, film, by, at)
}

async function correctFilm(trx: Transaction<DB>, head: HeadRow, film: FilmColumns, by: string, at: Date): Promise<void> {
  // What the rods do per turn follows from the film's stiffness, not from its mass.
  const stiffer = (['plies', 'thickness_um', 'modulus_gpa', 'poisson'] as const).some(column => film[column] !== head[column])
  await trx.updateTable('heads').set({ ...film, ...(stiffer && nothingLearned()), figures_since: at }).where('id', '=', head.id).execute()
  await endCalibrations(trx, [head.id], { by, because: 'the film\'s figures were corrected', at })
}

/** The film's own columns of a head's row. */
export function figuresOf(head: HeadRow): FilmColumns {
  const { film_id, material, plies, thickness_um, density_kg_m3, modulus_gpa, poisson, yield_mpa, coating, areal_density_kg_m2, areal_density_u95_kg_m2, weighing } = head
  return {
    film_id, material, plies, thickness_um, density_kg_m3, modulus_gpa, poisson, yield_mpa, coating, areal_density_kg_m2, areal_density_u95_kg_m2,
    weighing: weighing === null ? null : JSON.stringify(weighing),
  }
}
