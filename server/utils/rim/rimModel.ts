import type { RimBasis } from '../../../shared/acoustics'
import type { MicrophoneKind, ParameterMap } from './parameters'
import { lineAmplitude, soundingLines, strikeShapes, type AmplitudeContext, type LineAmplitude, type RimLine, type StrikeShapes } from './rimLine'
import { rimModes, type RimModes } from './rimModes'
import type { RoundSpectra } from './roundSpectra'

/** What the model is asked about: which bins of the round's spectra, on which rods. */
export interface RimProblem {
  spectra: RoundSpectra
  basis: RimBasis
  map: ParameterMap
  microphone: MicrophoneKind
  /** Angle of the rod that each tap was made at, rad. */
  rodAngles: Float64Array
  /** Bins used, rising. */
  bins: Int32Array
}

/** Real and imaginary part of tap i at used bin b stand at 2 (b * taps + i). */
export type RimSpectra = Float64Array
type Columns = (Float64Array | null)[]

const FINITE_STEP = 2e-4

/** Predicts the spectra of a round's taps, and their slopes by every unknown. */
export class RimModel {
  private readonly turns: { re: number, im: number, lastRe: number, lastIm: number }[]

  constructor(readonly problem: RimProblem) {
    const { spectra, bins } = problem
    this.turns = Array.from(bins, (bin) => {
      const phase = -2 * Math.PI * bin * spectra.stepHz * spectra.periodS
      return { re: Math.cos(phase), im: Math.sin(phase), lastRe: Math.cos(phase * spectra.count), lastIm: Math.sin(phase * spectra.count) }
    })
  }

  /** What was measured at the used bins. */
  measured(): RimSpectra {
    const { spectra, bins, map } = this.problem
    const out = new Float64Array(2 * bins.length * map.tapCount)
    bins.forEach((bin, b) => spectra.spectra.forEach((spectrum, i) => {
      out[2 * (b * map.tapCount + i)] = spectrum[2 * bin]!
      out[2 * (b * map.tapCount + i) + 1] = spectrum[2 * bin + 1]!
    }))
    return out
  }

  /** The spectra that x gives. */
  predict(x: Float64Array): RimSpectra {
    const { basis, map, rodAngles } = this.problem
    return this.run(x, strikeShapes(basis, map, rodAngles, x), rimModes(basis, map, x))
  }

  /** The same with its slopes by each unknown that `wanted` picks; null for the others. */
  linearise(x: Float64Array, wanted: (column: number) => boolean): { predicted: RimSpectra, columns: Columns } {
    const { basis, map, rodAngles, bins } = this.problem
    const shapes = strikeShapes(basis, map, rodAngles, x)
    const columns: Columns = Array.from({ length: map.count }, (_, c) => (wanted(c) ? new Float64Array(2 * bins.length * map.tapCount) : null))
    const predicted = this.run(x, shapes, rimModes(basis, map, x), columns)
    // Modes turn into one another as the rim changes: no slope of theirs is simple, so these few are taken by steps.
    const stepped = [map.tension, ...Array.from({ length: map.harmonicCount }, (_, h) => map.harmonics + h)]
    for (const c of stepped) {
      const column = columns[c]
      if (!column) continue
      const moved = x.slice()
      moved[c]! += FINITE_STEP
      const there = this.run(moved, shapes, rimModes(basis, map, moved))
      for (let r = 0; r < column.length; r++) column[r] = (there[r]! - predicted[r]!) / FINITE_STEP
    }
    return { predicted, columns }
  }

  private run(x: Float64Array, shapes: StrikeShapes, modes: RimModes, columns?: Columns): RimSpectra {
    const { basis, map, spectra, bins, microphone, rodAngles } = this.problem
    const out = new Float64Array(2 * bins.length * map.tapCount)
    const context: AmplitudeContext = { basis, map, microphone, rodAngles, delaysS: spectra.delaysS, shapes, modes }
    for (const line of soundingLines(basis, map, x, modes)) {
      const amplitudes = Array.from({ length: map.tapCount }, (_, i) => lineAmplitude(context, x, line, i, columns !== undefined))
      if (amplitudes.some(a => a.re !== 0 || a.im !== 0)) this.addLine(x, line, amplitudes, out, columns)
    }
    return out
  }

  /** Adds A G + conj(A) G' at every bin, G the transform of the windowed, decaying tone and G' that of its mirror image. */
  private addLine(x: Float64Array, line: RimLine, amplitudes: LineAmplitude[], out: RimSpectra, columns?: Columns): void {
    const { map, spectra, bins } = this.problem
    const { periodS, count, windowPerS } = spectra
    const fall = windowPerS + line.gamma
    const z = polar(Math.exp(-fall * periodS), line.omega * periodS)
    const last = polar(Math.exp(-fall * periodS * count), line.omega * periodS * count)
    for (let b = 0; b < bins.length; b++) {
      const turn = this.turns[b]!
      const ar = z.re * turn.re - z.im * turn.im
      const ai = z.re * turn.im + z.im * turn.re
      const nr = 1 - (last.re * turn.lastRe - last.im * turn.lastIm)
      const ni = -(last.re * turn.lastIm + last.im * turn.lastRe)
      const dr = 1 - ar
      const di = -ai
      const dd = dr * dr + di * di
      const gr = 0.5 * (nr * dr + ni * di) / dd
      const gi = 0.5 * (ni * dr - nr * di) / dd
      const mr = 1 - (z.re * turn.re + z.im * turn.im)
      const mi = -(z.re * turn.im - z.im * turn.re)
      const hr = 0.5 * mr / (mr * mr + mi * mi)
      const hi = -0.5 * mi / (mr * mr + mi * mi)
      const row = 2 * b * map.tapCount
      for (let i = 0; i < amplitudes.length; i++) {
        const { re, im } = amplitudes[i]!
        out[row + 2 * i]! += re * gr - im * gi + re * hr + im * hi
        out[row + 2 * i + 1]! += re * gi + im * gr + re * hi - im * hr
      }
      if (!columns) continue
      // dG/d(i omega) = dt [(1 - z^N) z - N z^N (1 - z)] / (1 - z)^2; N z^N is left out where the window has closed on it.
      const tr = nr * ar - ni * ai - count * ((1 - nr) * dr + ni * di)
      const ti = nr * ai + ni * ar - count * ((1 - nr) * di - ni * dr)
      const sr = dr * dr - di * di
      const si = 2 * dr * di
      const wr = 0.5 * periodS * (tr * sr + ti * si) / (sr * sr + si * si)
      const wi = 0.5 * periodS * (ti * sr - tr * si) / (sr * sr + si * si)
      for (let i = 0; i < amplitudes.length; i++) {
        const a = amplitudes[i]!
        const at = row + 2 * i
        for (const { column, re, im } of a.slopes) {
          const to = columns[column]
          if (!to) continue
          to[at]! += re * gr - im * gi + re * hr + im * hi
          to[at + 1]! += re * gi + im * gr + re * hi - im * hr
        }
        const toneRe = a.re * wr - a.im * wi
        const toneIm = a.re * wi + a.im * wr
        // By omega the tone turns by i, by gamma it falls by -1.
        const omegaRe = a.byOmega.re * gr - a.byOmega.im * gi - toneIm
        const omegaIm = a.byOmega.re * gi + a.byOmega.im * gr + toneRe
        const gammaRe = a.byGamma.re * gr - a.byGamma.im * gi - toneRe
        const gammaIm = a.byGamma.re * gi + a.byGamma.im * gr - toneIm
        for (const { family, share } of line.families) {
          const stretch = columns[map.frequencies + family]
          if (stretch) {
            stretch[at]! += share * line.omega * omegaRe
            stretch[at + 1]! += share * line.omega * omegaIm
          }
          const decay = columns[map.decays + family]
          if (decay) {
            const by = share * Math.exp(x[map.decays + family]!)
            decay[at]! += by * gammaRe
            decay[at + 1]! += by * gammaIm
          }
        }
      }
    }
  }
}

function polar(size: number, angle: number): { re: number, im: number } {
  return { re: size * Math.cos(angle), im: size * Math.sin(angle) }
}
