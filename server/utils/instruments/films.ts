import type { FilmView } from '../../../shared/schemas/instrument'
import type { DB, Kysely } from '../core/db'

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
