import type { Kysely } from 'kysely'
import type { DB } from '../database'

type Film = Omit<DB['films'], 'active' | 'position' | 'areal_density_kg_m2'> & { /** Coating's own mass, kg/m2. */ coatingKgM2?: number }

// Typical figures of each kind of film, from memory of data sheets; names are the workshop's own.
const pet = { material: 'pet', density_kg_m3: 1390, modulus_gpa: 4.5, poisson: 0.38, yield_mpa: 100 } as const
// Hide differs from skin to skin and with the weather: the yield here is a cautious one.
const hide = { material: 'skin', density_kg_m3: 1150, modulus_gpa: 2.2, poisson: 0.4, yield_mpa: 30 } as const

const catalogue: Film[] = [
  { id: 'pet-75', name: 'Sheer 75', ...pet, plies: 1, thickness_um: 75, coating: null },
  { id: 'pet-125', name: 'Clear 125', ...pet, plies: 1, thickness_um: 125, coating: null },
  { id: 'pet-188', name: 'Clear 188', ...pet, plies: 1, thickness_um: 188, coating: null },
  { id: 'pet-250', name: 'Clear 250', ...pet, plies: 1, thickness_um: 250, coating: null },
  { id: 'pet-250-frost', name: 'Frost 250', ...pet, plies: 1, thickness_um: 250, coating: 'white grain', coatingKgM2: 0.045 },
  { id: 'pet-300', name: 'Clear 300', ...pet, plies: 1, thickness_um: 300, coating: null },
  { id: 'pet-2x188', name: 'Twin 188', ...pet, plies: 2, thickness_um: 188, coating: null },
  { id: 'pet-2x188-frost', name: 'Twin Frost 188', ...pet, plies: 2, thickness_um: 188, coating: 'white grain', coatingKgM2: 0.045 },
  { id: 'pet-haze-200', name: 'Kettle Haze 200', ...pet, plies: 1, thickness_um: 200, coating: null },
  { id: 'skin-calf', name: 'Meadow Calf', ...hide, plies: 1, thickness_um: 420, coating: null },
  { id: 'skin-goat', name: 'Meadow Goat', ...hide, plies: 1, thickness_um: 550, coating: null },
  { id: 'woven-280', name: 'Weir Weave 280', material: 'woven', plies: 1, thickness_um: 280, density_kg_m3: 1150, modulus_gpa: 7, poisson: 0.3, yield_mpa: 160, coating: null },
]

/** Puts the catalogue's films in where they are missing. What a workshop has changed since stays as it is. */
export async function ensureFilms(db: Kysely<DB>): Promise<void> {
  const rows = catalogue.map(({ coatingKgM2 = 0, ...film }, position) => ({
    ...film, position, areal_density_kg_m2: film.plies * film.thickness_um * 1e-6 * film.density_kg_m3 + coatingKgM2,
  }))
  await db.insertInto('films').values(rows).onConflict(conflict => conflict.column('id').doNothing()).execute()
}
