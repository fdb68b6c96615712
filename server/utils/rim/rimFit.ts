import { CholeskyDecomposition, Matrix } from 'ml-matrix'
import { PER_TAP, type ParameterMap } from './parameters'
import { RimModel, type RimProblem, type RimSpectra } from './rimModel'

/** What is held to be likely of an unknown before the round is heard: mean and standard deviation. */
export interface RimPrior { mean: Float64Array, sd: Float64Array }

export interface RimFit {
  x: Float64Array
  /** Misfit per datum, 1 where noise, room and the model's own error explain what is left. */
  misfit: number
  /** Half of chi^2 with the priors: what starts are compared by. */
  cost: number
  /** Standard deviation and covariance of the unknowns in `of`, misfit included. */
  covariance: (of: number[]) => number[][]
  rounds: number
}

export interface RimFitOptions {
  mostRounds: number
  /** Share of the signal that the room adds at any bin, as an amplitude. */
  roomShare: number
  /** The model's own error as a share of the signal. */
  modelError: number
  wanted?: (column: number) => boolean
  /** Relative gain in cost below which the fit has settled. */
  settled?: number
}

/**
 * What stands between two taps' spectra and the model: noise, the model's own error, and the room. A room colours all taps
 * of a microphone that stays put alike: of each bin's taps together, the part that looks like what was heard there weighs less.
 *
 * The weighed product of two columns is then sum scale^2 a b - sum over bins of less (u.a)(u.b), u along what was heard.
 */
class Weighing {
  /** One factor a row. */
  readonly scale: Float64Array
  /** Unit vector of what was heard, by bin, over that bin's rows, after scaling. */
  readonly along: Float64Array
  /** 1 - 1 / (1 + what the room adds), by bin. */
  readonly less: Float64Array

  constructor(private readonly problem: RimProblem, heard: RimSpectra, options: RimFitOptions) {
    const { map, bins, spectra, microphone } = problem
    const taps = map.tapCount
    this.scale = new Float64Array(2 * bins.length * taps)
    this.along = new Float64Array(2 * bins.length * taps)
    this.less = new Float64Array(bins.length)
    const own = options.modelError ** 2 + (microphone === 'following' ? options.roomShare ** 2 : 0)
    for (let b = 0; b < bins.length; b++) {
      let length = 0
      for (let i = 0; i < taps; i++) {
        const at = 2 * (b * taps + i)
        const power = heard[at]! ** 2 + heard[at + 1]! ** 2
        const scale = Math.SQRT2 / Math.sqrt(spectra.noise + own * power)
        this.scale[at] = this.scale[at + 1] = scale
        this.along[at] = heard[at]! * scale
        this.along[at + 1] = heard[at + 1]! * scale
        length += power * scale * scale
      }
      const room = microphone === 'fixed' ? options.roomShare ** 2 * length / 2 : 0
      this.less[b] = room / (1 + room)
      const norm = Math.sqrt(Math.max(1e-300, length))
      for (let i = 0; i < 2 * taps; i++) this.along[2 * b * taps + i]! /= norm
    }
  }

  /** Scales a residual or a column of slopes, in place, and gives its parts along what was heard: real, imaginary, by bin. */
  scaled(values: Float64Array): Float64Array {
    const { map, bins } = this.problem
    const rows = 2 * map.tapCount
    const parts = new Float64Array(2 * bins.length)
    for (let r = 0; r < values.length; r++) values[r]! *= this.scale[r]!
    for (let b = 0; b < bins.length; b++) {
      if (this.less[b] === 0) continue
      let re = 0
      let im = 0
      for (let at = b * rows; at < (b + 1) * rows; at += 2) {
        re += this.along[at]! * values[at]! + this.along[at + 1]! * values[at + 1]!
        im += this.along[at]! * values[at + 1]! - this.along[at + 1]! * values[at]!
      }
      const root = Math.sqrt(this.less[b]!)
      parts[2 * b] = root * re
      parts[2 * b + 1] = root * im
    }
    return parts
  }
}

/** Levenberg-Marquardt on the weighed spectra with priors. Damping after Nielsen, IMM-REP-1999-05, Technical University of Denmark. */
export function fitRim(problem: RimProblem, start: Float64Array, prior: RimPrior, options: RimFitOptions): RimFit {
  const model = new RimModel(problem)
  const measured = model.measured()
  const weighing = new Weighing(problem, measured, options)
  const wanted = options.wanted ?? (() => true)
  const free = Array.from({ length: problem.map.count }, (_, c) => c).filter(wanted)
  let x = start.slice()
  let state = linearised(model, measured, weighing, x, prior, free)
  let damping = 1e-3
  let harder = 2
  let rounds = 0
  let small = 0
  for (; rounds < options.mostRounds && small < 2; rounds++) {
    const step = solve(state.normal, state.gradient, damping)
    const tried = x.slice()
    if (step) {
      free.forEach((c, k) => {
        tried[c]! += step[k]!
      })
    }
    const cost = step ? costAt(model, measured, weighing, tried, prior) : Infinity
    const promised = step ? promisedGain(state, step, damping) : 1
    const gain = state.cost - cost
    if (gain > 0) {
      x = tried
      damping = Math.max(1e-8, damping * Math.max(1 / 3, 1 - (2 * gain / promised - 1) ** 3))
      harder = 2
      small = gain < (options.settled ?? 1e-4) * state.cost ? small + 1 : 0
      state = linearised(model, measured, weighing, x, prior, free)
    } else {
      damping *= harder
      harder *= 2
      if (damping > 1e7) break
    }
  }
  const data = measured.length
  const misfit = Math.sqrt(2 * state.dataCost / data)
  return {
    x, misfit, rounds,
    cost: state.cost,
    covariance: of => covarianceOf(state.normal, free, of, Math.max(1, misfit) ** 2),
  }
}

interface State { cost: number, dataCost: number, normal: Float64Array[], gradient: Float64Array }

function linearised(model: RimModel, measured: RimSpectra, weighing: Weighing, x: Float64Array, prior: RimPrior, free: number[]): State {
  const { map } = model.problem
  const wanted = new Set(free)
  const { predicted, columns } = model.linearise(x, c => wanted.has(c))
  const residual = measured.map((y, r) => y - predicted[r]!)
  const residualParts = weighing.scaled(residual)
  const parts = free.map(c => weighing.scaled(columns[c]!))
  const normal = free.map(() => new Float64Array(free.length))
  const gradient = new Float64Array(free.length)
  for (let a = 0; a < free.length; a++) {
    const column = columns[free[a]!]!
    const rows = rowsOf(free[a]!, map)
    gradient[a] = dot(column, residual, rows) - dot(parts[a]!, residualParts, ALL) + (prior.mean[free[a]!]! - x[free[a]!]!) / prior.sd[free[a]!]! ** 2
    for (let b = 0; b <= a; b++) {
      const other = rowsOf(free[b]!, map)
      const apart = rows.every > 2 && other.every > 2 && rows.from !== other.from
      const product = (apart ? 0 : dot(column, columns[free[b]!]!, other.every > 2 ? other : rows)) - dot(parts[a]!, parts[b]!, ALL)
      normal[a]![b] = normal[b]![a] = product
    }
    normal[a]![a]! += 1 / prior.sd[free[a]!]! ** 2
  }
  const dataCost = 0.5 * (dot(residual, residual, ALL) - dot(residualParts, residualParts, ALL))
  return { cost: dataCost + priorCostOf(x, prior), dataCost, normal, gradient }
}

/** Pairs of rows, re and im: the first one, and how far the next is. */
interface Rows { from: number, every: number }
const ALL: Rows = { from: 0, every: 2 }

/** A tap's own unknowns touch its own rows only. */
function rowsOf(column: number, map: ParameterMap): Rows {
  return column < map.taps ? ALL : { from: 2 * Math.floor((column - map.taps) / PER_TAP), every: 2 * map.tapCount }
}

function dot(a: Float64Array, b: Float64Array, { from, every }: Rows): number {
  let sum = 0
  for (let r = from; r < a.length; r += every) sum += a[r]! * b[r]! + a[r + 1]! * b[r + 1]!
  return sum
}

function costAt(model: RimModel, measured: RimSpectra, weighing: Weighing, x: Float64Array, prior: RimPrior): number {
  const predicted = model.predict(x)
  const residual = measured.map((y, r) => y - predicted[r]!)
  const parts = weighing.scaled(residual)
  const cost = 0.5 * (dot(residual, residual, ALL) - dot(parts, parts, ALL)) + priorCostOf(x, prior)
  return Number.isFinite(cost) ? cost : Infinity
}

function priorCostOf(x: Float64Array, prior: RimPrior): number {
  let sum = 0
  for (let c = 0; c < x.length; c++) if (Number.isFinite(prior.sd[c]!)) sum += ((x[c]! - prior.mean[c]!) / prior.sd[c]!) ** 2
  return sum / 2
}

/** What a step would gain if the model were as straight as its slopes. */
function promisedGain({ normal, gradient }: State, step: Float64Array, damping: number): number {
  let sum = 0
  for (let k = 0; k < step.length; k++) sum += 0.5 * step[k]! * (gradient[k]! + damping * normal[k]![k]! * step[k]!)
  return sum
}

function solve(normal: Float64Array[], gradient: Float64Array, damping: number): Float64Array | null {
  // Scaled to a unit diagonal: the unknowns' units differ by many powers of ten.
  const scale = normal.map((row, i) => 1 / Math.sqrt(Math.max(1e-30, row[i]!)))
  const matrix = new Matrix(normal.map((row, i) => row.map((v, j) => v * (scale[i]! * scale[j]!) + (i === j ? damping : 0))))
  const cholesky = new CholeskyDecomposition(matrix)
  if (!cholesky.isPositiveDefinite()) return null
  const step = cholesky.solve(Matrix.columnVector(gradient.map((g, i) => g * scale[i]!)))
  return Float64Array.from(scale, (s, i) => s * step.get(i, 0))
}

function covarianceOf(normal: Float64Array[], free: number[], of: number[], factor: number): number[][] {
  const scale = normal.map((row, i) => 1 / Math.sqrt(Math.max(1e-30, row[i]!)))
  const cholesky = new CholeskyDecomposition(new Matrix(normal.map((row, i) => row.map((v, j) => v * (scale[i]! * scale[j]!) + (i === j ? 1e-9 : 0)))))
  return of.map((c) => {
    const k = free.indexOf(c)
    if (k < 0) return of.map(() => 0)
    const unit = new Float64Array(free.length)
    unit[k] = scale[k]!
    const column = cholesky.solve(Matrix.columnVector(unit))
    return of.map((d) => {
      const l = free.indexOf(d)
      return l < 0 ? 0 : factor * scale[l]! * column.get(l, 0)
    })
  })
}
