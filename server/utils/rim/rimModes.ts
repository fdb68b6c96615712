import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import type { RimBasis } from '../../../shared/acoustics'
import type { ParameterMap } from './parameters'

/** Modes of the unevenly pulled head. */
export interface RimModes {
  /** rad/s, rising. */
  omega: Float64Array
  /** Mode p's share of shape q at p * size + q. */
  mix: Float64Array
}

/** Solves the head's modes for the tension and harmonics in x; the families' own factors come after, so that they never turn a mode. */
export function rimModes(basis: RimBasis, map: ParameterMap, x: Float64Array): RimModes {
  const { size } = basis
  const rows = Array.from({ length: size }, () => new Float64Array(size))
  const scale = Math.exp(x[map.tension]!)
  for (let h = 0; h < map.harmonicCount; h++) {
    const ratio = x[map.harmonics + h]! * scale
    if (ratio === 0) continue
    const coupling = basis.coupling[h >> 1]![h & 1]!
    for (let p = 0; p < size; p++) {
      const row = rows[p]!
      for (let q = 0; q < size; q++) row[q]! += ratio * coupling[p * size + q]!
    }
  }
  for (let p = 0; p < size; p++) {
    const family = basis.families[basis.familyOf[p]!]!
    rows[p]![p]! += (family.omega * Math.exp(family.lnTension * x[map.tension]!)) ** 2
  }
  const found = new EigenvalueDecomposition(new Matrix(rows), { assumeSymmetric: true })
  const order = found.realEigenvalues.map((value, i) => ({ value, i })).sort((a, b) => a.value - b.value)
  const omega = new Float64Array(size)
  const mix = new Float64Array(size * size)
  const vectors = found.eigenvectorMatrix
  order.forEach(({ value, i }, p) => {
    omega[p] = Math.sqrt(Math.max(1, value))
    for (let q = 0; q < size; q++) mix[p * size + q] = vectors.get(q, i)
  })
  return { omega, mix }
}
