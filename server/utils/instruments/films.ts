import type { FilmView, HeadPatchBody } from '../../../shared/schemas/instrument'
import { weighedDensity } from '../../../shared/schemas/weighing'
import type { DB, Kysely, Transaction } from '../core/db'
import { DomainError } from '../core/errors'

/** The catalogue, in the workshop's order. */
export async function listFilms(db: Kysely<DB>): Promise<{ items: FilmView[] }> {
  const rows = await db.selectFrom('films').selectAll().where('active', '=', true).orderBy('position').orderBy('id').execute()
  return {
    items: rows.map(row => ({
      id: row.id, name: row.name, material: row.material, plies: row.plies, thicknessUm: row.thickness_um, densityKgM3: row.density_kg_m3,
      modulusGPa: row.modulus_gpa, poisson: row.poisson, yieldMPa: row.yield_mpa, arealDensityKgM2: row.areal_density_kg_m2, coating: row.coating,
    })),
  }
}

/** A head's film as its row keeps it: weighed where there is a weighing, else as stated, else from the plies. */
export function filmColumns(head: Omit<HeadPatchBody, 'sameFilm'>) {
  const { film, weighing } = head
  const weighed = weighing && weighedDensity(weighing)
  return {
    film_id: head.filmId || null, material: film.material, plies: film.plies, thickness_um: film.thicknessUm, density_kg_m3: film.densityKgM3,
    modulus_gpa: film.modulusGPa, poisson: film.poisson, yield_mpa: film.yieldMPa, coating: head.coating || null,
    areal_density_kg_m2: weighed ? weighed.arealDensityKgM2 : head.arealDensityKgM2 ?? film.plies * film.thicknessUm * 1e-6 * film.densityKgM3,
    areal_density_u95_kg_m2: weighed ? weighed.u95KgM2 : head.arealDensityU95KgM2 ?? null,
    weighing: weighing ? JSON.stringify(weighing) : null,
  }
}

export const nothingLearned = () => ({ kappa: null, kappa_variance: null, kappa_passes: 0 })

/** @throws DomainError bad-input for a film that the catalogue lacks */
export async function requireCatalogueFilm(trx: Transaction<DB>, id: string | null | undefined, path: string): Promise<void> {
  if (!id) return
  const film = await trx.selectFrom('films').select('id').where('id', '=', id).executeTakeFirst()
  if (!film) throw new DomainError('bad-input', 'Choose the film from the catalogue, or leave it out and give its figures.', [{ path, message: 'The catalogue has no such film.' }])
}
