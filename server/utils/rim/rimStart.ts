import type { RimFamily } from '../../../shared/acoustics'
import type { RimProblem } from './rimModel'
import type { RoundSpectra } from './roundSpectra'

/** Two lines that all taps share, as the two members of a pair, and where the lower one has its antinode. */
export interface PairFound {
  family: number
  lowHz: number
  highHz: number
  /** Share of the band's energy over all taps that the two lines explain, 0 to 1. */
  explained: number
  /** Antinodes of the lower member, rad, best first: the angles at which strikes sound it and not the higher one. */
  antinodes: number[]
}

const REACH = 0.11
const STEP_HZ = 0.7
const ANGLES = 48
const KEPT_PAIRS = 2
const KEPT_ANGLES = 2

interface Tone { hz: number, re: Float64Array, im: Float64Array }

/** Finds the pair of a family in the spectra of all taps: the two frequencies that explain most of its band, amplitudes free in each tap. */
export function findPairs(problem: RimProblem, family: number, centreHz: number, gammaPerS: number): PairFound[] {
  const { spectra, rodAngles, basis } = problem
  const { m } = basis.families[family]!
  const from = Math.max(1, Math.floor(centreHz * (1 - REACH) / spectra.stepHz))
  const to = Math.ceil(centreHz * (1 + REACH) / spectra.stepHz)
  const tones: Tone[] = []
  for (let hz = from * spectra.stepHz; hz <= to * spectra.stepHz; hz += STEP_HZ) tones.push(toneAt(spectra, hz, gammaPerS, from, to))
  const heard = spectra.spectra.map(spectrum => tones.map(tone => project(spectrum, tone, from)))
  const energy = spectra.spectra.reduce((sum, s) => {
    for (let k = from; k <= to; k++) sum += s[2 * k]! ** 2 + s[2 * k + 1]! ** 2
    return sum
  }, 0)
  const norms = tones.map(tone => overlap(tone, tone).re)
  const found: (Omit<PairFound, 'antinodes' | 'family'> & { a: number, b: number })[] = []
  for (let a = 0; a < tones.length; a++) {
    for (let b = a + 1; b < tones.length; b++) {
      const g = overlap(tones[a]!, tones[b]!)
      const det = norms[a]! * norms[b]! - g.re ** 2 - g.im ** 2
      if (det < 0.02 * norms[a]! * norms[b]!) continue
      let gained = 0
      for (const row of heard) {
        const p = row[a]!
        const q = row[b]!
        gained += (norms[b]! * (p.re ** 2 + p.im ** 2) + norms[a]! * (q.re ** 2 + q.im ** 2) - 2 * ((p.re * q.re + p.im * q.im) * g.re + (p.re * q.im - p.im * q.re) * -g.im)) / det
      }
      found.push({ lowHz: tones[a]!.hz, highHz: tones[b]!.hz, explained: gained / energy, a, b })
    }
  }
  found.sort((x, y) => y.explained - x.explained)
  const kept: typeof found = []
  for (const pair of found) {
    if (kept.length >= KEPT_PAIRS) break
    if (kept.every(k => Math.abs(k.lowHz - pair.lowHz) + Math.abs(k.highHz - pair.highHz) > 5)) kept.push(pair)
  }
  return kept.map(({ a, b, ...pair }) => ({ ...pair, family, antinodes: antinodes(heard.map(row => amplitudes(row[a]!, row[b]!, norms[a]!, norms[b]!, overlap(tones[a]!, tones[b]!))), rodAngles, m) }))
}

function toneAt(spectra: RoundSpectra, hz: number, gammaPerS: number, from: number, to: number): Tone {
  const re = new Float64Array(to - from + 1)
  const im = new Float64Array(to - from + 1)
  const fall = gammaPerS + spectra.windowPerS
  for (let k = from; k <= to; k++) {
    // The transform of a long decaying tone, 1 / (fall + i 2 pi (f - hz)).
    const off = 2 * Math.PI * (k * spectra.stepHz - hz)
    re[k - from] = fall / (fall * fall + off * off)
    im[k - from] = -off / (fall * fall + off * off)
  }
  return { hz, re, im }
}

function project(spectrum: Float64Array, tone: Tone, from: number): { re: number, im: number } {
  let re = 0
  let im = 0
  for (let k = 0; k < tone.re.length; k++) {
    const yr = spectrum[2 * (from + k)]!
    const yi = spectrum[2 * (from + k) + 1]!
    re += tone.re[k]! * yr + tone.im[k]! * yi
    im += tone.re[k]! * yi - tone.im[k]! * yr
  }
  return { re, im }
}

/** conj(a) . b */
function overlap(a: Tone, b: Tone): { re: number, im: number } {
  let re = 0
  let im = 0
  for (let k = 0; k < a.re.length; k++) {
    re += a.re[k]! * b.re[k]! + a.im[k]! * b.im[k]!
    im += a.re[k]! * b.im[k]! - a.im[k]! * b.re[k]!
  }
  return { re, im }
}

interface Complex { re: number, im: number }

/** Least-squares amplitudes of two overlapping tones from their projections. */
function amplitudes(p: Complex, q: Complex, np: number, nq: number, g: Complex): [Complex, Complex] {
  const det = np * nq - g.re ** 2 - g.im ** 2
  return [
    { re: (nq * p.re - (g.re * q.re - g.im * q.im)) / det, im: (nq * p.im - (g.re * q.im + g.im * q.re)) / det },
    { re: (np * q.re - (g.re * p.re + g.im * p.im)) / det, im: (np * q.im - (g.re * p.im - g.im * p.re)) / det },
  ]
}

/**
 * Angles at which the lower member may have its antinode. In each tap the two amplitudes stand as cos m(theta - psi) to
 * w sin m(theta - psi), whatever the force; w, what the microphone makes of it, is the same in all or, where the
 * microphone follows, goes with the strike's own shape.
 */
function antinodes(found: [Complex, Complex][], rodAngles: Float64Array, m: number): number[] {
  const costs = Array.from({ length: ANGLES }, (_, step) => {
    const psi = Math.PI / m * step / ANGLES
    let ss = 0
    let cc = 0
    const cross = { re: 0, im: 0 }
    found.forEach(([a, b], i) => {
      const c = Math.cos(m * (rodAngles[i]! - psi))
      const s = Math.sin(m * (rodAngles[i]! - psi))
      // |a w s - b c|^2, least over complex w.
      ss += (a.re ** 2 + a.im ** 2) * s * s
      cc += (b.re ** 2 + b.im ** 2) * c * c
      cross.re += (a.re * b.re + a.im * b.im) * s * c
      cross.im += (a.re * b.im - a.im * b.re) * s * c
    })
    const spread = found.reduce((sum, [a, b]) => sum + a.re ** 2 + a.im ** 2 + b.re ** 2 + b.im ** 2, 0)
    return { psi, cost: (cc - (cross.re ** 2 + cross.im ** 2) / Math.max(1e-300, ss) + 1e-3 * cc) / spread }
  })
  const minima = costs.filter((c, i) => c.cost <= costs[(i + ANGLES - 1) % ANGLES]!.cost && c.cost <= costs[(i + 1) % ANGLES]!.cost)
  return minima.sort((a, b) => a.cost - b.cost).slice(0, KEPT_ANGLES).map(c => c.psi)
}

/**
 * Harmonic N_(2m) / N_0 that splits a pair like this: its cos and sin parts. The lower member has its antinode where the
 * harmonic makes that shape softest.
 */
export function harmonicOf(problem: RimProblem, pair: PairFound, antinodeRad: number): { k: number, cos: number, sin: number } | null {
  const { basis } = problem
  const family: RimFamily = basis.families[pair.family]!
  const k = 2 * family.m
  if (k > basis.highest) return null
  const coupling = basis.coupling[k - 2]![0]
  // What cos k theta does to cos m theta: the same, with the other sign, as to sin m theta.
  const own = coupling[family.first * basis.size + family.first]!
  const middle = (pair.lowHz + pair.highHz) / 2
  const split = (pair.highHz - pair.lowHz) / middle
  const size = split * family.omega ** 2 / Math.abs(own)
  // cos m(theta - psi) is lowered by -sign(own) cos k(theta - psi).
  const sign = -Math.sign(own)
  return { k, cos: sign * size * Math.cos(k * antinodeRad), sin: sign * size * Math.sin(k * antinodeRad) }
}
