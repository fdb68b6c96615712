import { shapeBasis } from './basis'
import { besselJ } from './bessel'
import { gaussLegendre } from './quadrature'
import type { PredictedMode } from './types'

/** One (m,n) of the even head: one shape for m = 0, else cos m theta and sin m theta. */
export interface RimFamily {
  m: number
  n: number
  /** Index of its first shape in the basis, and how many it has. */
  first: number
  count: 1 | 2
  /** Of the even head, rad/s. */
  omega: number
  /** d ln f / d ln T. */
  lnTension: number
  /** Decay by radiation alone, 1/s. */
  radiationPerS: number
}

/** Shapes of the even head and how an uneven rim couples them. */
export interface RimBasis {
  families: RimFamily[]
  /** Family of each shape, and which of its two: 0 cos, 1 sin. */
  familyOf: Int32Array
  sideOf: Int32Array
  size: number
  /** Highest harmonic of the rim that is known here. */
  highest: number
  /**
   * For harmonic k (index k - 2): what N_k / N_0 = 1 adds to omega^2, as matrices row by row, (rad/s)^2; the first for cos k
   * theta, the second for sin k theta.
   */
  coupling: [Float64Array, Float64Array][]
  /** Mass-normalised shape q at r/R and angle, and its slopes by r/R and by angle. */
  shapeAt(q: number, ratio: number, angleRad: number, out: { value: number, byRadius: number, byAngle: number }): void
}

const NODES = 40
const ANGLES = 64
const rule = gaussLegendre(NODES)

interface Radial { value: Float64Array, slope: Float64Array, scale: number }

/**
 * The basis for reading a rim: the even head's own modes, air and cavity included, coupled by the plane stress of a film
 * whose edge is pulled by N_0 (1 + sum_k a_k cos k theta + b_k sin k theta).
 *
 *   N_rr = [A k(1-k) r^(k-2) + B (k+2-k^2) r^k] cos k theta,  N_rt and N_tt alike;  B = N_k/(2(k+1)), A = -N_k/(2(k-1))
 *
 * The energy 1/2 int (N_rr w_r^2 + 2 N_rt w_r w_t / r + N_tt w_t^2 / r^2) dA couples (m,n) with (m +- k, n') and, for
 * k = m + m', with (k - m, n').
 * @param modes    of the even head at N_0, struck head only, in order of frequency
 * @param highest  highest harmonic k, whole, >= 2
 * Source: Timoshenko & Goodier, Theory of Elasticity, ch. 4; Rayleigh-Ritz.
 */
export function rimBasis(modes: PredictedMode[], highest: number): RimBasis {
  const families: RimFamily[] = []
  const familyOf: number[] = []
  const sideOf: number[] = []
  for (const mode of modes) {
    const count = mode.m === 0 ? 1 : 2
    families.push({ m: mode.m, n: mode.n, first: familyOf.length, count, omega: 2 * Math.PI * mode.frequencyHz, lnTension: mode.sensitivity.lnTension, radiationPerS: mode.radiationDampingPerS })
    for (let side = 0; side < count; side++) {
      familyOf.push(families.length - 1)
      sideOf.push(side)
    }
  }
  const radials = modes.map((mode, j) => radialOf(mode, families[j]!))
  const size = familyOf.length
  const coupling = Array.from({ length: highest - 1 }, (_, i) => couplingOf(i + 2, families, radials, size))
  const mixes = modes.map((mode, j) => ({ basis: shapeBasis(mode.m), weights: mode.struckShape, scale: radials[j]!.scale }))
  const shapeAt: RimBasis['shapeAt'] = (q, ratio, angleRad, out) => {
    const family = families[familyOf[q]!]!
    const { basis, weights, scale } = mixes[familyOf[q]!]!
    const { m } = family
    let value = 0
    let slope = 0
    for (let n = 0; n < basis.count; n++) {
      const unit = scale * weights[n]! * Math.SQRT2 / basis.slopes[n]!
      const alpha = basis.zeros[n]!
      value += unit * besselJ(m, alpha * ratio)
      slope += unit * alpha * (m === 0 ? -besselJ(1, alpha * ratio) : (besselJ(m - 1, alpha * ratio) - besselJ(m + 1, alpha * ratio)) / 2)
    }
    const norm = 1 / Math.sqrt(m === 0 ? 2 * Math.PI : Math.PI)
    const c = Math.cos(m * angleRad) * norm
    const s = Math.sin(m * angleRad) * norm
    const [turned, slid] = sideOf[q] === 0 ? [c, -m * s] : [s, m * c]
    out.value = value * turned
    out.byRadius = slope * turned
    out.byAngle = value * slid
  }
  return { families, familyOf: Int32Array.from(familyOf), sideOf: Int32Array.from(sideOf), size, highest, coupling, shapeAt }
}

/** A mode's radial shape at the rule's nodes, scaled so that the stiffness integral of an even rim gives omega^2's share by tension. */
function radialOf(mode: PredictedMode, family: RimFamily): Radial {
  const basis = shapeBasis(mode.m)
  const value = new Float64Array(NODES)
  const slope = new Float64Array(NODES)
  let energy = 0
  for (let n = 0; n < basis.count; n++) {
    const weight = mode.struckShape[n]!
    const alpha = basis.zeros[n]!
    const unit = weight * Math.SQRT2 / basis.slopes[n]!
    energy += (weight * alpha) ** 2
    for (let i = 0; i < NODES; i++) {
      const x = alpha * rule.nodes[i]!
      value[i]! += unit * besselJ(mode.m, x)
      slope[i]! += unit * alpha * (mode.m === 0 ? -besselJ(1, x) : (besselJ(mode.m - 1, x) - besselJ(mode.m + 1, x)) / 2)
    }
  }
  // energy * scale^2 = omega^2 * 2 d ln f / d ln T: the share of the stiffness that is this film's tension.
  const scale = family.omega * Math.sqrt(Math.max(0, 2 * family.lnTension) / energy)
  return { value: value.map(v => v * scale), slope: slope.map(v => v * scale), scale }
}

function couplingOf(k: number, families: RimFamily[], radials: Radial[], size: number): [Float64Array, Float64Array] {
  const cos = new Float64Array(size * size)
  const sin = new Float64Array(size * size)
  const bigB = 1 / (2 * (k + 1))
  const bigA = -1 / (2 * (k - 1))
  const rr = new Float64Array(NODES)
  const rt = new Float64Array(NODES)
  const tt = new Float64Array(NODES)
  for (let i = 0; i < NODES; i++) {
    const r = rule.nodes[i]!
    const low = r ** (k - 2)
    const high = r ** k
    rr[i] = rule.weights[i]! * r * (bigA * k * (1 - k) * low + bigB * (k + 2 - k * k) * high)
    rt[i] = rule.weights[i]! * k * (bigA * (k - 1) * low + bigB * (k + 1) * high)
    tt[i] = rule.weights[i]! / r * (bigA * k * (k - 1) * low + bigB * (k + 2) * (k + 1) * high)
  }
  for (const [a, p] of families.entries()) {
    for (const [b, q] of families.entries()) {
      if (b > a || (Math.abs(p.m - q.m) !== k && p.m + q.m !== k)) continue
      const integrals = radialIntegrals(radials[a]!, radials[b]!, rr, rt, tt)
      for (let i = 0; i < p.count; i++) {
        for (let j = 0; j < q.count; j++) {
          const at = angular(k, p.m, i, q.m, j)
          const row = p.first + i
          const column = q.first + j
          cos[row * size + column] = cos[column * size + row] = integrals.rr * at.ccCos + integrals.slopeValue * at.cdSin + integrals.valueSlope * at.dcSin + integrals.tt * at.ddCos
          sin[row * size + column] = sin[column * size + row] = integrals.rr * at.ccSin - integrals.slopeValue * at.cdCos - integrals.valueSlope * at.dcCos + integrals.tt * at.ddSin
        }
      }
    }
  }
  return [cos, sin]
}

function radialIntegrals(p: Radial, q: Radial, rr: Float64Array, rt: Float64Array, tt: Float64Array) {
  const out = { rr: 0, slopeValue: 0, valueSlope: 0, tt: 0 }
  for (let i = 0; i < NODES; i++) {
    out.rr += rr[i]! * p.slope[i]! * q.slope[i]!
    out.slopeValue += rt[i]! * p.slope[i]! * q.value[i]!
    out.valueSlope += rt[i]! * p.value[i]! * q.slope[i]!
    out.tt += tt[i]! * p.value[i]! * q.value[i]!
  }
  return out
}

/** Integrals over the circle of the angular parts (c) and their slopes (d) with cos k theta and sin k theta. */
function angular(k: number, m: number, i: number, mm: number, j: number) {
  const norm = (order: number) => 1 / Math.sqrt(order === 0 ? 2 * Math.PI : Math.PI)
  const weight = norm(m) * norm(mm) * 2 * Math.PI / ANGLES
  const out = { ccCos: 0, ccSin: 0, cdCos: 0, cdSin: 0, dcCos: 0, dcSin: 0, ddCos: 0, ddSin: 0 }
  for (let step = 0; step < ANGLES; step++) {
    const theta = 2 * Math.PI * step / ANGLES
    const turn = (order: number, side: number) => side === 0 ? [Math.cos(order * theta), -order * Math.sin(order * theta)] as const : [Math.sin(order * theta), order * Math.cos(order * theta)] as const
    const [c, d] = turn(m, i)
    const [cc, dd] = turn(mm, j)
    const cosine = weight * Math.cos(k * theta)
    const sine = weight * Math.sin(k * theta)
    out.ccCos += c * cc * cosine
    out.ccSin += c * cc * sine
    out.cdCos += c * dd * cosine
    out.cdSin += c * dd * sine
    out.dcCos += d * cc * cosine
    out.dcSin += d * cc * sine
    out.ddCos += d * dd * cosine
    out.ddSin += d * dd * sine
  }
  return out
}
