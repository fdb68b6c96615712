/**
 * Uneven edge tension: the plane-stress field of a disc under N(theta) = N0 (1 + sum ratio_k cos k(theta - phase_k)),
 * k >= 2, as a perturbation of the even drum's air-loaded modes.
 *
 *   N_rr = [A k(1-k) r^(k-2) + B (k+2-k^2) r^k] cos k(theta - phase), and so on; B = N_k/(2(k+1)), A = -N_k/(2(k-1))
 *
 * Source: Timoshenko & Goodier, Theory of Elasticity, ch. 4 (Airy function of a disc, shear-free edge).
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { besselJ, jm } from './bessel'
import type { Complex } from './complex'
import { add, c, scale } from './complex'
import { BASIS, M_MAX } from './airTable'
import { basisZeros } from './airHalfSpace'
import type { DrumModel, ModalRoot } from './modes'
import { gaussLegendre } from './quadrature'
import type { SimHarmonic } from './types'

/** One mode with an angle: cos m theta (side 0) or sin m theta (side 1). */
export interface Turned { root: ModalRoot, side: 0 | 1 }

/** A resonance of the (perhaps uneven) drum as a mix of turned even modes. */
export interface MixedMode { omega: number, gamma: number, parts: { turned: Turned, weight: number }[], leading: Turned }

const NODES = 48
const rule = gaussLegendre(NODES)
const radii = Float64Array.from(rule.x, x => (x + 1) / 2)

interface Radial { value: Float64Array, slope: Float64Array }

let radialShapes: Radial[][] | undefined

/** Unit-norm shapes phi_n(r) on a unit disc and their slopes, at the rule's nodes. */
function shapes(): Radial[][] {
  radialShapes ??= Array.from({ length: M_MAX + 1 }, (_, m) => basisZeros(m).map((alpha) => {
    const norm = Math.SQRT2 / jm(m + 1, alpha)
    const value = new Float64Array(NODES)
    const slope = new Float64Array(NODES)
    const j = new Float64Array(M_MAX + 3)
    for (let i = 0; i < NODES; i++) {
      besselJ(m + 1, alpha * radii[i]!, j)
      value[i] = norm * j[m]!
      slope[i] = norm * alpha * (m === 0 ? -j[1]! : (j[m - 1]! - j[m + 1]!) / 2)
    }
    return { value, slope }
  }))
  return radialShapes
}

function mixRadial(root: ModalRoot, film: number, radius: number): Radial {
  const value = new Float64Array(NODES)
  const slope = new Float64Array(NODES)
  shapes()[root.m]!.forEach((shape, n) => {
    const weight = root.shape[film * BASIS + n]!.re
    for (let i = 0; i < NODES; i++) {
      value[i]! += weight * shape.value[i]! / radius
      slope[i]! += weight * shape.slope[i]! / radius
    }
  })
  return { value, slope }
}

const ANGLES = 64

interface Angular { cc: number, ds: number, sd: number, dd: number }

/** Angular integrals met so far for one drum: they depend on m, side and harmonic only. */
type AngularCache = Map<string, Angular>

function cachedAngular(p: Turned, q: Turned, h: SimHarmonic, cache: AngularCache): Angular {
  const key = `${p.root.m},${p.side},${q.root.m},${q.side},${h.k}`
  const found = cache.get(key) ?? angular(p, q, h)
  cache.set(key, found)
  return found
}

/** Products of the angular parts integrated over the circle, their norms included. */
function angular(p: Turned, q: Turned, h: SimHarmonic): Angular {
  const out = { cc: 0, ds: 0, sd: 0, dd: 0 }
  const norm = (t: Turned): number => 1 / Math.sqrt(t.root.m === 0 ? 2 * Math.PI : Math.PI)
  const weight = norm(p) * norm(q) * 2 * Math.PI / ANGLES
  for (let i = 0; i < ANGLES; i++) {
    const theta = 2 * Math.PI * i / ANGLES
    const f = (t: Turned): number => t.side === 0 ? Math.cos(t.root.m * theta) : Math.sin(t.root.m * theta)
    const d = (t: Turned): number => t.side === 0 ? -t.root.m * Math.sin(t.root.m * theta) : t.root.m * Math.cos(t.root.m * theta)
    const cosine = Math.cos(h.k * (theta - h.phaseRad)) * weight
    const sine = Math.sin(h.k * (theta - h.phaseRad)) * weight
    out.cc += f(p) * f(q) * cosine
    out.dd += d(p) * d(q) * cosine
    out.sd += f(p) * d(q) * sine
    out.ds += d(p) * f(q) * sine
  }
  return out
}

/** <p| Delta K |q> for one harmonic of relative size `h.ratio`, on the batter film. */
function element(p: Turned, q: Turned, a: Radial, b: Radial, h: SimHarmonic, tension: number, cache: AngularCache): number {
  const { cc, ds, sd, dd } = cachedAngular(p, q, h, cache)
  if (Math.abs(cc) + Math.abs(ds) + Math.abs(sd) + Math.abs(dd) < 1e-12) return 0
  const k = h.k
  const bigB = 1 / (2 * (k + 1))
  const bigA = -1 / (2 * (k - 1))
  let sum = 0
  for (let i = 0; i < NODES; i++) {
    const r = radii[i]!
    const low = r ** (k - 2)
    const high = r ** k
    const rr = bigA * k * (1 - k) * low + bigB * (k + 2 - k * k) * high
    const rt = k * (bigA * (k - 1) * low + bigB * (k + 1) * high)
    const tt = bigA * k * (k - 1) * low + bigB * (k + 2) * (k + 1) * high
    const energy = rr * a.slope[i]! * b.slope[i]! * cc
      + rt * (a.slope[i]! * b.value[i]! * sd + a.value[i]! * b.slope[i]! * ds) / r
      + tt * a.value[i]! * b.value[i]! * dd / (r * r)
    sum += rule.w[i]! / 2 * energy * r
  }
  return sum * h.ratio * tension
}

/** The drum's modes with their angle; an even head gives each root twice (cos, sin). */
export function mixedModes(model: DrumModel, maxHz: number): MixedMode[] {
  const turned: Turned[] = model.roots
    .filter(root => root.omega < 2 * Math.PI * maxHz)
    .flatMap(root => root.m === 0 ? [{ root, side: 0 as const }] : [{ root, side: 0 as const }, { root, side: 1 as const }])
  const harmonics = model.drum.unevenness ?? []
  if (harmonics.length === 0) {
    return turned.map(t => ({ omega: t.root.omega, gamma: t.root.gamma, parts: [{ turned: t, weight: 1 }], leading: t }))
  }
  const film = model.films[0]!
  const radials = new Map(model.roots.map(root => [root, mixRadial(root, 0, film.effectiveRadiusM)]))
  const size = turned.length
  const cache: AngularCache = new Map()
  const matrix = Matrix.zeros(size, size)
  for (let p = 0; p < size; p++) {
    for (let q = 0; q <= p; q++) {
      const a = turned[p]!
      const b = turned[q]!
      let value = p === q ? a.root.omega ** 2 : 0
      for (const h of harmonics) value += element(a, b, radials.get(a.root)!, radials.get(b.root)!, h, film.head.tensionNPerM, cache)
      matrix.set(p, q, value)
      matrix.set(q, p, value)
    }
  }
  const evd = new EigenvalueDecomposition(matrix, { assumeSymmetric: true })
  return evd.realEigenvalues.map((lambda, column) => {
    const weights = evd.eigenvectorMatrix.getColumn(column)
    const leading = turned[weights.reduce((best, w, i) => Math.abs(w) > Math.abs(weights[best]!) ? i : best, 0)]!
    const gamma = weights.reduce((sum, w, i) => sum + w * w * turned[i]!.root.gamma, 0)
    const parts = weights.map((weight, i) => ({ turned: turned[i]!, weight })).filter(part => Math.abs(part.weight) > 3e-4)
    return { omega: Math.sqrt(lambda), gamma, parts, leading }
  })
}

/** Coefficients of a mixed mode's film shape for one m and side: what strike and microphone act on. */
export function gatherShape(mode: MixedMode): { m: number, side: 0 | 1, shape: Complex[] }[] {
  const groups = new Map<string, { m: number, side: 0 | 1, shape: Complex[] }>()
  for (const { turned, weight } of mode.parts) {
    const key = `${turned.root.m}:${turned.side}`
    const group = groups.get(key) ?? { m: turned.root.m, side: turned.side, shape: turned.root.shape.map(() => c(0)) }
    group.shape = group.shape.map((x, i) => add(x, scale(turned.root.shape[i]!, weight)))
    groups.set(key, group)
  }
  return [...groups.values()]
}
