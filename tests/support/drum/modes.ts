/**
 * Modes of the simulated drum: Rayleigh–Ritz over Bessel shapes with the full air matrices of its construction.
 *
 *   A(w) = diag(T k^2 + D k^4) - w^2 (sigma + M_air(w)),  k = alpha/(R - c sqrt(D/T))
 *
 * Real roots of the lossless problem are counted (so none is missed, air resonances of the shell included), then
 * each is moved to its complex frequency by Newton's method.
 */
import { add, c, complexMatrix, div, mul, scale } from './complex'
import type { Complex, ComplexMatrix } from './complex'
import { BASIS, KAPPA_MAX, M_MAX, readAirTable } from './airTable'
import { basisZeros, halfSpaceTables } from './airHalfSpace'
import { freeDiscTables } from './airFreeDisc'
import { closedTube, crossModes, openTube, tubePoles } from './airTube'
import { bracketSteps, nearestNull, negativeCount, refineRoot } from './eigen'
import type { SimDrum, SimHead } from './types'
import { bendingStiffness, simAir } from './types'

export interface FilmModel { head: SimHead, effectiveRadiusM: number, wavenumbers: number[][], stiffness: number[][] }

/** One resonance. `shape` holds its coefficients on the unit-norm shapes, head after head, scaled to unit modal mass. */
export interface ModalRoot {
  m: number
  /** 0 where the air moves and the film hardly does. */
  n: number
  head: 'batter' | 'resonant'
  omega: number
  gamma: number
  shape: Complex[]
  /** d ln(w^2) / d ln(T) of the struck (batter, resonant) head. */
  tensionShare: [number, number]
}

export interface DrumModel { drum: SimDrum, films: FilmModel[], density: number, sound: number, roots: ModalRoot[] }

export function filmModel(drum: SimDrum, head: SimHead): FilmModel {
  const d = bendingStiffness(head)
  const effectiveRadiusM = drum.radiusM - (drum.edgeTerm ?? 0.5) * Math.sqrt(d / head.tensionNPerM)
  const wavenumbers = Array.from({ length: M_MAX + 1 }, (_, m) => basisZeros(m).map(alpha => alpha / effectiveRadiusM))
  const stiffness = wavenumbers.map(row => row.map(k => head.tensionNPerM * k * k + d * k ** 4))
  return { head, effectiveRadiusM, wavenumbers, stiffness }
}

/** Length of the closed tube that stands for a bowl or a shell. */
export function tubeLength(drum: SimDrum): number {
  if (drum.construction !== 'kettle') return drum.depthM
  if (drum.bowlVolumeM3 === undefined) throw new RangeError('a kettle needs its bowl volume')
  return drum.bowlVolumeM3 / (Math.PI * drum.radiusM ** 2)
}

/** Air mass matrix of one m at wavenumber k0, kg/m2. */
export function airMatrix(model: Omit<DrumModel, 'roots'>, m: number, k0: Complex, lossless = false): ComplexMatrix {
  const { drum, films, density } = model
  const out = complexMatrix(BASIS * films.length)
  const put = (row: number, column: number, re: number, im: number): void => {
    out.re[row * out.n + column]! += density * re
    out.im[row * out.n + column]! += density * im
  }
  films.forEach((film, f) => {
    const tables = drum.construction === 'frame' ? freeDiscTables() : halfSpaceTables()
    const sides = drum.construction === 'fixture' ? 2 : 1
    const table = readAirTable(tables[m]!, scale(k0, film.effectiveRadiusM))
    for (let i = 0; i < BASIS; i++) {
      for (let j = 0; j < BASIS; j++) {
        const s = sides * film.effectiveRadiusM
        put(f * BASIS + i, f * BASIS + j, s * table.re[i * BASIS + j]!, lossless ? 0 : s * table.im[i * BASIS + j]!)
      }
    }
  })
  if (drum.construction === 'fixture' || drum.construction === 'frame') return out
  const couplings = films.map(film => crossModes(m, film.effectiveRadiusM / drum.radiusM))
  const length = tubeLength(drum)
  couplings[0]!.forEach(({ b }, q) => {
    const open = drum.construction === 'open'
    const closed = open ? undefined : closedTube(b, drum.radiusM, length, k0)
    const self = closed?.self ?? openTube(b, drum.radiusM, length, k0, lossless)
    films.forEach((_, f) => films.forEach((_unused, g) => {
      // Two heads moving the same way push the air in turn: the factor from head to head counts negative.
      const factor = f === g ? self : scale(closed!.across, -1)
      const left = couplings[f]![q]!.coupling
      const right = couplings[g]![q]!.coupling
      for (let i = 0; i < BASIS; i++) {
        for (let j = 0; j < BASIS; j++) {
          const s = left[i]! * right[j]!
          put(f * BASIS + i, g * BASIS + j, s * factor.re, lossless ? 0 : s * factor.im)
        }
      }
    }))
  })
  return out
}

function dynamicMatrix(model: Omit<DrumModel, 'roots'>, m: number, omega: Complex, lossless = false): ComplexMatrix {
  const out = airMatrix(model, m, scale(omega, 1 / model.sound), lossless)
  const square = mul(omega, omega)
  for (let e = 0; e < out.re.length; e++) {
    const product = mul(square, c(out.re[e]!, out.im[e]!))
    out.re[e] = -product.re
    out.im[e] = -product.im
  }
  model.films.forEach((film, f) => film.stiffness[m]!.forEach((k, n) => {
    const at = (f * BASIS + n) * (out.n + 1)
    out.re[at]! += k - square.re * film.head.arealDensityKgM2
    out.im[at]! -= square.im * film.head.arealDensityKgM2
  }))
  return out
}

/** All resonances of an even drum below `maxHz`. */
export function solveDrum(drum: SimDrum, maxHz = 3000): DrumModel {
  const heads = drum.construction === 'double-headed' ? [drum.batter, drum.resonant!] : [drum.batter]
  const { density, sound } = simAir(drum)
  const model = { drum, films: heads.map(head => filmModel(drum, head)), density, sound }
  const limit = Math.min(maxHz, 0.97 * KAPPA_MAX * sound / (2 * Math.PI * drum.radiusM))
  const roots: ModalRoot[] = []
  for (let m = 0; m <= M_MAX; m++) roots.push(...solveOrder(model, m, limit))
  return { ...model, roots }
}

function solveOrder(model: Omit<DrumModel, 'roots'>, m: number, maxHz: number): ModalRoot[] {
  const { drum, sound } = model
  const kind = drum.construction === 'open' ? 'open' : 'closed'
  const poles = drum.construction === 'fixture' || drum.construction === 'frame'
    ? []
    : tubePoles(kind, m, drum.radiusM, tubeLength(drum), sound, maxHz)
  const count = (hz: number): number => {
    const a = dynamicMatrix(model, m, c(2 * Math.PI * hz), true)
    return negativeCount(a.re, a.n) + poles.filter(pole => pole < hz).length
  }
  const found: ModalRoot[] = []
  for (const { at, times } of bracketSteps(count, 5, maxHz, 0.2)) {
    const a = dynamicMatrix(model, m, c(2 * Math.PI * at), true)
    for (const start of nearestNull(a.re, a.n, times)) {
      const root = refineRoot(omega => dynamicMatrix(model, m, omega), 2 * Math.PI * at, start)
      if (!root || root.omega.re <= 0 || found.some(other => Math.abs(other.omega - root.omega.re) < 1e-7 * root.omega.re && times === 1)) continue
      const modal = toModal(model, m, root.omega, root.v, root.slope)
      if (modal) found.push(modal)
    }
  }
  return name(found.sort((a, b) => a.omega - b.omega))
}

function toModal(model: Omit<DrumModel, 'roots'>, m: number, omega: Complex, v: Complex[], slope: Complex): ModalRoot | undefined {
  const mass = div(scale(slope, -0.5), omega)
  const film = v.reduce((sum, x, i) => sum + (x.re * x.re + x.im * x.im) * model.films[Math.floor(i / BASIS)]!.head.arealDensityKgM2, 0)
  // The film takes so little part that neither strike nor microphone would notice.
  if (film / Math.hypot(mass.re, mass.im) < 0.01) return undefined
  const r = Math.sqrt(Math.hypot(mass.re, mass.im))
  const half = Math.atan2(mass.im, mass.re) / 2
  const root = c(r * Math.cos(half), r * Math.sin(half))
  const shape = v.map(x => div(x, root))
  const share = model.films.map((f, i) => {
    let sum = c(0)
    f.wavenumbers[m]!.forEach((k, n) => {
      const x = shape[i * BASIS + n]!
      sum = add(sum, scale(mul(x, x), f.head.tensionNPerM * k * k))
    })
    return div(sum, mul(omega, omega)).re
  })
  return { m, n: 0, head: 'batter', omega: omega.re, gamma: -omega.im, shape, tensionShare: [share[0]!, share[1] ?? 0] }
}

/**
 * Gives each root the head and shape it holds most of, the film's own share of its energy counting; what is left
 * over is a resonance of the shell's air that carries the film along (n = 0).
 */
function name(roots: ModalRoot[]): ModalRoot[] {
  const claims = roots.flatMap((root, at) => {
    const sizes = root.shape.map(x => Math.hypot(x.re, x.im))
    const most = Math.max(...sizes)
    const share = Math.max(0, root.tensionShare[0] + root.tensionShare[1])
    return sizes.map((size, i) => ({ at, i, weight: size * Math.sqrt(share), own: share > 0.2 && size >= 0.5 * most })).filter(claim => claim.own)
  })
  claims.sort((a, b) => b.weight - a.weight)
  const taken = new Set<number>()
  const named = new Set<number>()
  for (const { at, i } of claims) {
    if (taken.has(i) || named.has(at)) continue
    taken.add(i)
    named.add(at)
    roots[at]!.n = i % BASIS + 1
    roots[at]!.head = i < BASIS ? 'batter' : 'resonant'
  }
  return roots.filter(root => root.n <= BASIS - 2)
}
