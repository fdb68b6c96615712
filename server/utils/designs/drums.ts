import type { DesignDrum, DesignFilm } from '../../../shared/utils/headDesign'
import { bareDiameterDrum } from '../../../shared/utils/headDesign'
import type { FilmRow, HeadRow } from '../../../db/instruments.table'
import type { SignedInUser } from '../../../shared/types/roles'
import type { DB, Kysely } from '../core/db'
import { DomainError, notFound } from '../core/errors'

export type CatalogueFilm = DesignFilm & { material: FilmRow['material'], coating: string | null }

const filmFigures = (row: Pick<FilmRow | HeadRow, 'plies' | 'thickness_um' | 'density_kg_m3' | 'modulus_gpa' | 'poisson' | 'yield_mpa' | 'areal_density_kg_m2'>) => ({
  plies: row.plies, thicknessUm: row.thickness_um, densityKgM3: row.density_kg_m3, modulusGPa: row.modulus_gpa,
  poisson: row.poisson, yieldMPa: row.yield_mpa, arealDensityKgM2: row.areal_density_kg_m2,
})

export async function listDesignFilms(db: Kysely<DB>): Promise<CatalogueFilm[]> {
  const rows = await db.selectFrom('films').selectAll().where('active', '=', true).orderBy('position').orderBy('id').execute()
  return rows.map(row => ({ id: row.id, name: row.name, material: row.material, coating: row.coating, ...filmFigures(row) }))
}

export function requireFilm(films: CatalogueFilm[], id: string): CatalogueFilm {
  const film = films.find(candidate => candidate.id === id)
  if (!film) throw new DomainError('bad-input', 'This film is not in the catalogue. Choose another.', [{ path: 'filmId', message: 'Choose a film of the catalogue.' }])
  return film
}

/** The drum of the person's own instrument (any instrument for the workshop), or the fixture for a bare diameter. */
export async function getDesignDrum(db: Kysely<DB>, user: SignedInUser, instrumentId: string | null | undefined, diameterMm: number | null | undefined): Promise<DesignDrum> {
  if (!instrumentId) return bareDiameterDrum(diameterMm!)
  const instrument = await db.selectFrom('instruments').selectAll().where('id', '=', instrumentId)
    .$if(user.role === 'customer', query => query.where('customer_id', '=', user.id)).executeTakeFirst()
  if (!instrument) throw notFound('The instrument')
  const resonant = instrument.construction === 'double-headed'
    ? await db.selectFrom('heads').selectAll().where('instrument_id', '=', instrumentId).where('side', '=', 'resonant').executeTakeFirst()
    : undefined
  return {
    construction: instrument.construction, diameterMm: instrument.diameter_mm, depthMm: instrument.depth_mm, bowlVolumeL: instrument.bowl_volume_l,
    ...(resonant && { otherFilm: filmFigures(resonant) }),
  }
}
