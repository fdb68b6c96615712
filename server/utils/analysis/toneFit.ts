import { exponentialSpectrum, type BinBand, type DecayingTone, type RingGrid } from './decay'
import { invertSymmetric, solveSymmetric } from './solve'

export interface ToneFit {
  tones: DecayingTone[]
  /** Sum of squared residuals over the band, and before any tone was subtracted. */
  residual: number
  total: number
  /** Inverse of the normal matrix, 4 rows a tone in the order re, im, gamma, frequency; undefined where it is singular. */
  inverse: Float64Array | undefined
}

export const MAX_GAMMA_PER_S = 250
const PER_TONE = 4

/**
 * Fits decaying tones to a run of bins by least squares: amplitude, phase, decay and frequency of all of them together.
 *
 * In white noise the bins of a rectangular window carry independent errors, so this is the maximum-likelihood fit of the
 * band and its variance reaches the Cramer-Rao bound of a decaying tone (Yao & Pandit, IEEE Trans. Signal Process. 43
 * (1995) 878). Levenberg-Marquardt with exact derivatives.
 * @param band    spectrum with every other tone, and the images of these, already subtracted
 * @param starts  frequency and decay to start from; amplitudes are solved for
 */
export function fitTones(grid: RingGrid, band: BinBand, starts: { frequencyHz: number, gammaPerS: number }[], iterations = 8): ToneFit {
  const total = energyOf(band.values)
  let tones = solveAmplitudes(grid, band, starts)
  let state = normalEquations(grid, band, tones)
  let damping = 1e-3
  for (let i = 0; i < iterations; i++) {
    const step = solveSymmetric(state.matrix, state.gradient, damping)
    if (!step) {
      damping *= 10
      continue
    }
    const moved = tones.map((tone, p) => advance(tone, step, p, grid))
    const next = normalEquations(grid, band, moved)
    if (next.residual < state.residual) {
      const gained = state.residual - next.residual
      tones = moved
      state = next
      damping = Math.max(1e-9, damping / 10)
      if (gained < 1e-7 * next.residual) break
    } else {
      damping *= 10
      if (damping > 1e4) break
    }
  }
  return { tones, residual: state.residual, total, inverse: invertSymmetric(state.matrix, tones.length * PER_TONE) }
}

function advance(tone: DecayingTone, step: Float64Array, p: number, grid: RingGrid): DecayingTone {
  const limit = 6 // Hz: a larger jump lands on another tone
  const df = Math.max(-limit, Math.min(limit, step[4 * p + 3]!))
  return {
    re: tone.re + step[4 * p]!,
    im: tone.im + step[4 * p + 1]!,
    gammaPerS: Math.max(0, Math.min(MAX_GAMMA_PER_S, tone.gammaPerS + step[4 * p + 2]!)),
    frequencyHz: Math.max(1, Math.min(grid.sampleRateHz / 2, tone.frequencyHz + df)),
  }
}

/** Complex amplitudes that fit best with frequencies and decays held. */
function solveAmplitudes(grid: RingGrid, band: BinBand, starts: { frequencyHz: number, gammaPerS: number }[]): DecayingTone[] {
  const shapes = starts.map((start) => {
    const g = new Float64Array(2 * band.count)
    exponentialSpectrum(grid, start.frequencyHz, start.gammaPerS, band.from, band.count, g)
    return g
  })
  const size = 2 * starts.length
  const columns = shapes.flatMap(g => [g, turned(g)])
  const matrix = new Float64Array(size * size)
  const right = new Float64Array(size)
  fillNormal(columns, band.values, matrix, right)
  const a = solveSymmetric(matrix, right, 1e-9) ?? new Float64Array(size)
  return starts.map((start, p) => ({ frequencyHz: start.frequencyHz, gammaPerS: start.gammaPerS, re: a[2 * p]!, im: a[2 * p + 1]! }))
}

function normalEquations(grid: RingGrid, band: BinBand, tones: DecayingTone[]) {
  const residual = band.values.slice()
  const columns: Float64Array[] = []
  const rate = grid.sampleRateHz
  for (const tone of tones) {
    const g = new Float64Array(2 * band.count)
    const slope = new Float64Array(2 * band.count)
    exponentialSpectrum(grid, tone.frequencyHz, tone.gammaPerS, band.from, band.count, g, slope)
    const byGamma = new Float64Array(2 * band.count)
    const byFrequency = new Float64Array(2 * band.count)
    const turn = 2 * Math.PI / rate
    for (let k = 0; k < g.length; k += 2) {
      residual[k]! -= tone.re * g[k]! - tone.im * g[k + 1]!
      residual[k + 1]! -= tone.re * g[k + 1]! + tone.im * g[k]!
      const ar = tone.re * slope[k]! - tone.im * slope[k + 1]!
      const ai = tone.re * slope[k + 1]! + tone.im * slope[k]!
      byGamma[k] = -ar / rate
      byGamma[k + 1] = -ai / rate
      byFrequency[k] = -ai * turn
      byFrequency[k + 1] = ar * turn
    }
    columns.push(g, turned(g), byGamma, byFrequency)
  }
  const size = columns.length
  const matrix = new Float64Array(size * size)
  const gradient = new Float64Array(size)
  fillNormal(columns, residual, matrix, gradient)
  return { matrix, gradient, residual: energyOf(residual) }
}

/** Times the imaginary unit. */
function turned(g: Float64Array): Float64Array {
  const out = new Float64Array(g.length)
  for (let k = 0; k < g.length; k += 2) {
    out[k] = -g[k + 1]!
    out[k + 1] = g[k]!
  }
  return out
}

function fillNormal(columns: Float64Array[], right: Float64Array, matrix: Float64Array, gradient: Float64Array) {
  const size = columns.length
  for (let i = 0; i < size; i++) {
    const a = columns[i]!
    gradient[i] = dot(a, right)
    for (let j = i; j < size; j++) matrix[i * size + j] = matrix[j * size + i] = dot(a, columns[j]!)
  }
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let k = 0; k < a.length; k++) sum += a[k]! * b[k]!
  return sum
}

const energyOf = (values: Float64Array) => dot(values, values)
