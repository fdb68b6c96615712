import type { DrumModel, PredictedMode } from '../../../shared/acoustics'
import type { MatchingContext } from './matchingContext'

/** Knots of ln T: between them ln f is straight to a few parts in 10^5, away from resonances of the shell's air. */
const KNOT_STEP = 0.12
/** Two heads are searched with wider tolerances, so wider knots serve; and knots of the ratio of their tensions, ln. */
const KNOT_STEP_TWO = 0.2
const RATIO_STEP = 0.28
/** How far apart the two heads' squared wave speeds may be, ln. */
export const MOST_RATIO = 1.4
const HIGHEST_M = 8

/** One mode over the knots: ln f and radiation damping. NaN where it lies above the band. */
export interface ModeTrack {
  m: number
  n: number
  other: boolean
  /** Share of its energy in the film, of a resonance of the shell's air; 1 for a mode of a head. */
  filmShare: number
  lnFrequency: Float64Array
  damping: Float64Array
  /** d ln f / d ln(air scale), at the middle knot. */
  airSensitivity: number
}

/** Predicted modes over the whole range of tension; for two heads, m = 0 over both tensions. */
export interface ModeTables {
  from: number
  step: number
  knots: number
  /** m >= 1 of the struck head (two heads at the same wave speed), and every m of a single head. */
  struck: ModeTrack[]
  /** m >= 1 of the other head, by its own tension less context.otherOffset. */
  other: ModeTrack[]
  /** Two heads: m = 0 by ratio, then by ln T of the struck head. */
  axisymmetric: ModeTrack[][]
  ratios: number[]
}

const cache = new WeakMap<MatchingContext, ModeTables>()

function tracks(knots: number, at: (i: number) => PredictedMode[], keep: (mode: PredictedMode) => boolean): ModeTrack[] {
  const made = new Map<string, ModeTrack>()
  for (let i = 0; i < knots; i++) {
    for (const mode of at(i)) {
      if (!keep(mode)) continue
      const name = `${mode.m},${mode.n},${mode.head},${mode.air?.index}`
      let track = made.get(name)
      if (!track) {
        track = { m: mode.m, n: mode.n, other: mode.head === 'other', filmShare: mode.air?.filmShare ?? 1, lnFrequency: new Float64Array(knots).fill(NaN), damping: new Float64Array(knots), airSensitivity: mode.sensitivity.lnAirScale }
        made.set(name, track)
      }
      track.lnFrequency[i] = Math.log(mode.frequencyHz)
      track.damping[i] = mode.radiationDampingPerS
      track.filmShare = Math.max(track.filmShare, mode.air?.filmShare ?? 1)
      if (i === knots >> 1) track.airSensitivity = mode.sensitivity.lnAirScale
    }
  }
  return [...made.values()]
}

/** Makes (or finds again) the tables of one drum up to a frequency. @param maxHz highest frequency a line may have */
export function modeTables(context: MatchingContext, maxHz: number): ModeTables {
  const known = cache.get(context)
  if (known) return known
  const { model, lnTensionFrom, lnTensionTo, twoHeads, otherOffset } = context
  const step = twoHeads ? KNOT_STEP_TWO : KNOT_STEP
  const knots = Math.ceil((lnTensionTo - lnTensionFrom) / step) + 1
  const tension = (i: number) => Math.exp(lnTensionFrom + i * step)
  const orders = Array.from({ length: HIGHEST_M + 1 }, (_, m) => m)
  const at = (i: number, ratio: number, nodalDiameters: number[]) => model.predictModes({
    tensionNPerM: tension(i), otherTensionNPerM: tension(i) * Math.exp(otherOffset + ratio), maxHz, nodalDiameters, rough: true, airModes: !twoHeads,
  })
  const made: ModeTables = { from: lnTensionFrom, step, knots, struck: [], other: [], axisymmetric: [], ratios: [] }
  if (!twoHeads) {
    made.struck = tracks(knots, i => at(i, 0, orders), () => true)
  } else {
    const upper = orders.slice(1)
    // Modes with nodal diameters hardly know of the other head: a search may take each head alone on the closed shell.
    const [struck, other] = context.alone
    const byItself = (head: DrumModel, tensionNPerM: number) => head.predictModes({ tensionNPerM, maxHz, nodalDiameters: upper, rough: true })
    made.struck = tracks(knots, i => byItself(struck!, tension(i)), () => true)
    made.other = tracks(knots, i => byItself(other!, tension(i) * Math.exp(otherOffset)).map(mode => ({ ...mode, head: 'other' as const })), () => true)
    for (let ratio = -MOST_RATIO; ratio <= MOST_RATIO + 1e-9; ratio += RATIO_STEP) {
      made.ratios.push(ratio)
      made.axisymmetric.push(axisymmetricTracks(knots, i => at(i, ratio, [0])))
    }
  }
  cache.set(context, made)
  return made
}

/** m = 0 of two heads in order of frequency: names change where the heads cross, order does not. */
function axisymmetricTracks(knots: number, at: (i: number) => PredictedMode[]): ModeTrack[] {
  return tracks(knots, i => at(i).slice(0, 8).map((mode, k) => ({ ...mode, n: (k >> 1) + 1, head: k % 2 === 0 ? 'struck' as const : 'other' as const })), () => true)
}
