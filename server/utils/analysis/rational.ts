import type { RingSpectrum } from './clusters'
import type { BinBand } from './decay'
import { solveSymmetric } from './solve'

const ITERATIONS = 6

/**
 * Frequencies and decays of tones that share a run of bins, found without any start.
 *
 * Over a narrow band the spectrum of K decaying tones is rational, X(x) = [B(x) + exp(-2 pi i k N / size) C(x)] / A(x),
 * deg B, C < K, with the tones at the zeros of A; C stands for what the end of the record cuts off. A X - B - eC = 0 is
 * linear; its weights 1 / A come from the step before. Two tones a few Hz apart, which a step-wise fit takes for one,
 * come out at once.
 * Sources: Steiglitz & McBride, IEEE Trans. Autom. Control 10 (1965) 461; Sanathanan & Koerner, ibid. 8 (1963) 56.
 * @param band   every other tone taken off
 * @param count  K, at least 1
 * @returns K zeros or none where the equations are singular; a zero that grows is given with decay 0
 */
export function rationalTones(ring: RingSpectrum, band: BinBand, count: number): { frequencyHz: number, gammaPerS: number }[] {
  const step = ring.spectrum.stepHz
  const centre = band.from + (band.count - 1) / 2
  const scale = (band.count - 1) / 2
  const powers = powersOf(band, centre, scale, count)
  let polynomial = Array.from({ length: 2 * count }, () => 0)
  let zeros: Complex[] | undefined
  for (let i = 0; i < ITERATIONS; i++) {
    const solved = weightedStep(ring, band, powers, polynomial, count, i === 0)
    if (!solved) break
    polynomial = solved
    zeros = zerosOf(solved, count)
  }
  // x_p = (f_p + i gamma / (2 pi)) in units of the band.
  return (zeros ?? []).map(z => ({ frequencyHz: (centre + scale * z.re) * step, gammaPerS: Math.max(0, 2 * Math.PI * scale * step * z.im) }))
}

interface Complex { re: number, im: number }

/** x^0 … x^K of each bin, x from -1 to 1 over the band. */
function powersOf(band: BinBand, centre: number, scale: number, count: number): Float64Array[] {
  const x = Float64Array.from({ length: band.count }, (_, k) => (band.from + k - centre) / scale)
  const powers = [new Float64Array(band.count).fill(1)]
  for (let j = 1; j <= count; j++) powers.push(powers[j - 1]!.map((p, k) => p * x[k]!))
  return powers
}

/** One linear step: coefficients of A below its leading 1, interleaved, lowest first. */
function weightedStep(ring: RingSpectrum, band: BinBand, powers: Float64Array[], previous: number[], count: number, first: boolean): number[] | undefined {
  const rows = band.count
  const columns: Float64Array[] = []
  const target = new Float64Array(2 * rows)
  const blocks = 3 * count
  for (let j = 0; j < 2 * blocks; j++) columns.push(new Float64Array(2 * rows))
  for (let k = 0; k < rows; k++) {
    let weight = 1
    if (!first) {
      let re = powers[count]![k]!
      let im = 0
      for (let j = 0; j < count; j++) {
        re += previous[2 * j]! * powers[j]![k]!
        im += previous[2 * j + 1]! * powers[j]![k]!
      }
      weight = 1 / Math.max(1e-9, Math.hypot(re, im))
    }
    const xr = band.values[2 * k]! * weight
    const xi = band.values[2 * k + 1]! * weight
    const turn = -2 * Math.PI * (band.from + k) * ring.length / ring.size
    const er = Math.cos(turn) * weight
    const ei = Math.sin(turn) * weight
    target[2 * k] = -xr * powers[count]![k]!
    target[2 * k + 1] = -xi * powers[count]![k]!
    for (let j = 0; j < count; j++) {
      const p = powers[j]![k]!
      put(columns, 2 * j, k, xr * p, xi * p)
      put(columns, 2 * (count + j), k, -weight * p, 0)
      put(columns, 2 * (2 * count + j), k, -er * p, -ei * p)
    }
  }
  const size = columns.length
  const matrix = new Float64Array(size * size)
  const right = new Float64Array(size)
  for (let i = 0; i < size; i++) {
    right[i] = dot(columns[i]!, target)
    for (let j = i; j < size; j++) matrix[i * size + j] = matrix[j * size + i] = dot(columns[i]!, columns[j]!)
  }
  const solved = solveSymmetric(matrix, right, 1e-13) ?? solveSymmetric(matrix, right, 1e-10)
  return solved && [...solved.subarray(0, 2 * count)]
}

/** A complex column and its quarter turn, as two real columns. */
function put(columns: Float64Array[], at: number, k: number, re: number, im: number) {
  columns[at]![2 * k] = re
  columns[at]![2 * k + 1] = im
  columns[at + 1]![2 * k] = -im
  columns[at + 1]![2 * k + 1] = re
}

/** Zeros of x^K + sum c_j x^j by the Durand-Kerner iteration. */
function zerosOf(coefficients: number[], count: number): Complex[] | undefined {
  const zeros = Array.from({ length: count }, (_, p): Complex => ({ re: 0.3 * Math.cos(0.4 + 2 * Math.PI * p / count), im: 0.3 * Math.sin(0.4 + 2 * Math.PI * p / count) }))
  for (let i = 0; i < 60; i++) {
    let moved = 0
    zeros.forEach((z, p) => {
      let value: Complex = { re: 1, im: 0 }
      for (let j = count - 1; j >= 0; j--) {
        value = times(value, z)
        value = { re: value.re + coefficients[2 * j]!, im: value.im + coefficients[2 * j + 1]! }
      }
      const others = zeros.reduce((product, other, q) => (q === p ? product : times(product, { re: z.re - other.re, im: z.im - other.im })), { re: 1, im: 0 })
      const norm = others.re ** 2 + others.im ** 2 + 1e-300
      const change = { re: (value.re * others.re + value.im * others.im) / norm, im: (value.im * others.re - value.re * others.im) / norm }
      zeros[p] = { re: z.re - change.re, im: z.im - change.im }
      moved = Math.max(moved, Math.hypot(change.re, change.im))
    })
    if (moved < 1e-9) break
  }
  return zeros.every(z => Number.isFinite(z.re) && Number.isFinite(z.im)) ? zeros : undefined
}

const times = (a: Complex, b: Complex): Complex => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re })

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let k = 0; k < a.length; k++) sum += a[k]! * b[k]!
  return sum
}
