import { addAirTables, type AirTable } from './airTable'
import { MAX_NODAL_DIAMETERS, shapeBasis, type ShapeBasis } from './basis'
import { freeDiscTables } from './airFreeDisc'
import { halfSpaceTables } from './airHalfSpace'
import { tubeAir, type AirResonance, type TubeAir } from './airTube'
import type { DrumGeometry } from './types'

/** All the air that one m feels on a drum, in units of rho0 R. */
export interface GroupAir {
  basis: ShapeBasis
  /** On each head from its own motion, both sides together. */
  own: AirTable
  /** On one head from the other's motion; two heads only. */
  cross?: AirTable
  resonances: AirResonance[]
  /** Cavity spring: rho0 c0^2 / R times springFactor times the product of overlaps. */
  springFactor: number
  springOverlap?: Float64Array
}

/** A kettle's bowl is taken as the closed cylinder of the same volume and radius: L = V / (pi R^2). */
function closedDepth(geometry: DrumGeometry): number {
  if (geometry.construction !== 'kettle') return geometry.depthM
  const volume = geometry.bowlVolumeM3
  if (volume === undefined || !(volume > 0)) throw new RangeError('a kettle needs its bowl volume')
  return volume / (Math.PI * geometry.radiusM ** 2)
}

const MOST_KEPT = 104
const kept = new Map<string, TubeAir>()

/** The air of a tube, kept: a drum is read many times over, with two heads and with each alone. */
function keptTubeAir(m: number, lambda: number, closed: boolean): TubeAir {
  const key = `${m},${lambda.toPrecision(9)},${closed}`
  const known = kept.get(key)
  if (known) return known
  const made = tubeAir(m, lambda, closed)
  if (kept.size >= MOST_KEPT) kept.delete(kept.keys().next().value!)
  kept.set(key, made)
  return made
}

/**
 * The air around a head by construction, for every m, as pure numbers.
 *
 * fixture: half spaces on both sides; frame: a free disc; open: half space and open tube; kettle and double-headed: half
 * space and closed tube. Sources: see airHalfSpace.ts, airFreeDisc.ts, airTube.ts.
 * @throws RangeError when a kettle has no bowl volume
 */
export function constructionAir(geometry: DrumGeometry): GroupAir[] {
  const groups: GroupAir[] = []
  for (let m = 0; m <= MAX_NODAL_DIAMETERS; m++) {
    const basis = shapeBasis(m)
    const none = { basis, resonances: [], springFactor: 0 }
    if (geometry.construction === 'frame') {
      groups.push({ ...none, own: freeDiscTables()[m]! })
      continue
    }
    const outside = halfSpaceTables()[m]!
    if (geometry.construction === 'fixture') {
      groups.push({ ...none, own: addAirTables(outside, outside) })
      continue
    }
    const closed = geometry.construction !== 'open'
    const lambda = closedDepth(geometry) / geometry.radiusM
    const inside = keptTubeAir(m, lambda, closed)
    groups.push({
      basis,
      own: addAirTables(outside, inside.own),
      cross: geometry.construction === 'double-headed' ? inside.cross : undefined,
      resonances: inside.resonances,
      springFactor: inside.springOverlap ? 1 / Math.max(lambda, 0.02) : 0,
      springOverlap: inside.springOverlap,
    })
  }
  return groups
}
