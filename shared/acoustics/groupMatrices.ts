import { newStencil, placeStencil, readStencil, type AirStencil } from './airTable'
import type { GroupAir } from './constructionAir'
import { bendingStiffnessNm, effectiveRadiusM } from './film'
import type { HeadFilm } from './types'

/** Everything about one head that its matrices need. */
export interface HeadState {
  film: HeadFilm
  tensionNPerM: number
}

export interface GroupState {
  /** One head, or two: struck first. */
  heads: HeadState[]
  radiusM: number
  airDensityKgM3: number
  soundSpeedMPerS: number
  /** Factor on the added mass of this group. */
  airScale: number
  edgeFactor: number
}

/**
 * Stiffness and mass matrices of one m: shapes of the struck head, of the other head, then the air's resonances.
 *
 *   K a = omega^2 M(omega) a,  K = diag(T k^2 + D k^4) + cavity spring,  k = alpha / (R - c sqrt(D/T)),
 *   M = sigma + airScale rho0 R B(kappa0); a resonance is a unit mass y on the spring omega_a^2 (y - g^T a)^2 / 2.
 *
 * Both are symmetric; per area and by normalised shapes, so K is in N/m3 and M in kg/m2.
 */
export class GroupMatrices {
  readonly size: number
  readonly shapes: number
  readonly stiffness: Float64Array
  /** Diagonal of the heads' own stiffness, without the cavity. */
  readonly headStiffness: Float64Array
  /** Derivatives of that diagonal by ln T of its own head, and by the edge factor. */
  readonly tensionSlope: Float64Array
  readonly edgeSlope: Float64Array
  /** Coupling of each resonance to each shape, row by row. */
  readonly coupling: Float64Array
  readonly resonanceSquared: Float64Array
  /** Scratch space, size x size, for whoever works with these matrices next. */
  readonly workA: Float64Array
  readonly workB: Float64Array
  private readonly stencil: AirStencil = newStencil()

  constructor(readonly air: GroupAir, readonly state: GroupState) {
    const count = air.basis.count
    this.shapes = count * state.heads.length
    this.size = this.shapes + air.resonances.length
    this.headStiffness = new Float64Array(this.shapes)
    this.tensionSlope = new Float64Array(this.shapes)
    this.edgeSlope = new Float64Array(this.shapes)
    state.heads.forEach((head, h) => this.fillHead(h * count, head))
    this.coupling = new Float64Array(air.resonances.length * this.shapes)
    this.resonanceSquared = new Float64Array(air.resonances.length)
    this.fillCoupling()
    this.stiffness = new Float64Array(this.size * this.size)
    this.fillStiffness()
    this.workA = new Float64Array(this.size * this.size)
    this.workB = new Float64Array(this.size * this.size)
  }

  private fillHead(from: number, head: HeadState): void {
    const { radiusM, edgeFactor } = this.state
    const d = bendingStiffnessNm(head.film)
    const t = head.tensionNPerM
    const radius = effectiveRadiusM(radiusM, d, t, edgeFactor)
    const layer = Math.sqrt(d / t)
    this.air.basis.zeros.forEach((zero, n) => {
      const k2 = (zero / radius) ** 2
      const byLnWavenumber = 2 * t * k2 + 4 * d * k2 * k2
      this.headStiffness[from + n] = t * k2 + d * k2 * k2
      this.tensionSlope[from + n] = t * k2 - byLnWavenumber * edgeFactor * layer / (2 * radius)
      this.edgeSlope[from + n] = byLnWavenumber * layer / radius
    })
  }

  private fillCoupling(): void {
    const { air, state } = this
    const scale = Math.sqrt(state.airScale * state.airDensityKgM3 * state.radiusM)
    air.resonances.forEach((resonance, a) => {
      this.resonanceSquared[a] = (resonance.kappa * state.soundSpeedMPerS / state.radiusM) ** 2
      for (let i = 0; i < this.shapes; i++) {
        const n = i % air.basis.count
        const sign = i < air.basis.count ? 1 : resonance.otherSign
        this.coupling[a * this.shapes + i] = sign * scale * resonance.coupling[n]!
      }
    })
  }

  private fillStiffness(): void {
    const { air, state, shapes, size, stiffness } = this
    const spring = air.springFactor * state.airDensityKgM3 * state.soundSpeedMPerS ** 2 / state.radiusM
    const count = air.basis.count
    const overlap = air.springOverlap
    for (let i = 0; i < shapes; i++) {
      stiffness[i * size + i] = this.headStiffness[i]!
      if (!overlap) continue
      for (let j = 0; j < shapes; j++) {
        const sign = (i < count) === (j < count) ? 1 : -1
        stiffness[i * size + j] = stiffness[i * size + j]! + sign * spring * overlap[i % count]! * overlap[j % count]!
      }
    }
    for (let a = 0; a < air.resonances.length; a++) {
      const square = this.resonanceSquared[a]!
      const row = shapes + a
      stiffness[row * size + row] = square
      for (let i = 0; i < shapes; i++) {
        const gi = this.coupling[a * shapes + i]!
        stiffness[i * size + row] = -square * gi
        stiffness[row * size + i] = -square * gi
        for (let j = 0; j < shapes; j++) stiffness[i * size + j] = stiffness[i * size + j]! + square * gi * this.coupling[a * shapes + j]!
      }
    }
  }

  kappaAt(omega: number): number {
    return omega * this.state.radiusM / this.state.soundSpeedMPerS
  }

  /** M at an angular frequency, row-major. */
  massAt(omega: number, out: Float64Array): void {
    out.fill(0)
    this.fillAir(omega, out, 'mass', false, this.state.airScale)
    const count = this.air.basis.count
    for (let i = 0; i < this.size; i++) {
      out[i * this.size + i] = out[i * this.size + i]! + (i < this.shapes ? this.state.heads[i < count ? 0 : 1]!.film.arealDensityKgM2 : 1)
    }
  }

  /** The smooth part of the air's mass, its derivative by ln omega, or its loss, times a factor, as a full matrix. */
  fillAir(omega: number, out: Float64Array, part: 'mass' | 'loss', slope: boolean, factor: number): void {
    const { air, size, stencil } = this
    const count = air.basis.count
    const kappa = this.kappaAt(omega)
    placeStencil(kappa, stencil)
    const weights = slope ? stencil.slopes : stencil.weights
    const unit = factor * this.state.airDensityKgM3 * this.state.radiusM * (slope ? kappa : 1)
    const two = this.shapes > count
    for (let n = 0, column = 0; n < count; n++) {
      for (let k = 0; k <= n; k++, column++) {
        const own = unit * readStencil(air.own[part], air.own.width, column, stencil.row, weights)
        out[n * size + k] = own
        out[k * size + n] = own
        if (!two) continue
        out[(n + count) * size + k + count] = own
        out[(k + count) * size + n + count] = own
        const cross = unit * readStencil(air.cross![part], air.own.width, column, stencil.row, weights)
        out[n * size + k + count] = cross
        out[k * size + n + count] = cross
        out[(n + count) * size + k] = cross
        out[(k + count) * size + n] = cross
      }
    }
  }
}
