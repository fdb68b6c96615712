import type { LineFindings, SpectralLine } from './lines'
import type { MatchedLines, TensionFit } from './tensionFit'
import type { HeadSide } from '../../../shared/types/reading'

const MAINS_HZ = [50, 60]
/** A line counts as a multiple of the mains within this, Hz. */
const MAINS_WITHIN_HZ = 0.5
/** Hum is slow to die in a short recording too: a multiple of the mains that rings longer than this, s. */
const HUM_T60_S = 8
/** Another drum's tone rings this much longer than any tone of the head that was tapped: it was not struck, and nothing damps it. */
const RINGS_LONGER = 2.5
/** A line is the other head's when nearer to one of its modes than this, ln. */
const OTHER_HEAD_WITHIN = 0.02
/** A resonance of the shell's air lies within this of where it is predicted, ln. */
const AIR_WITHIN = 0.04
/** Half of an uneven pair, ln of the distance for m = 1; a room's ripple, widths of the louder line. */
const PAIR_WITHIN = 0.032
const RIPPLE_WIDTHS = 4
/** Wires buzz in a broad band above this, Hz; short-lived, 1/s; many at once. */
const BUZZ_FROM_HZ = 500
const BUZZ_GAMMA_PER_S = 35
const BUZZ_LINES = 4

export interface CauseFacts {
  matched: MatchedLines[]
  fit: TensionFit
  struck: HeadSide
  longestT60S: number
  buzz: boolean
}

const t60Of = (line: SpectralLine) => Math.log(1000) / Math.max(line.gammaPerS, 1e-6)

/** What telling the causes of unexplained lines needs of the whole fit; times in s, frequencies in Hz. */
export function causeFacts(fit: TensionFit, findings: LineFindings, left: SpectralLine[], struck: HeadSide): CauseFacts {
  const matched = fit.matched.filter(match => match.weight >= 0.1)
  const buzzing = left.filter(line => !line.steady && line.frequencyHz > BUZZ_FROM_HZ && line.gammaPerS > BUZZ_GAMMA_PER_S)
  return {
    fit, matched, struck,
    longestT60S: Math.max(0, ...matched.flatMap(match => match.lines.map(({ line }) => t60Of(line)))),
    // Wires lie on one head of two; a single head that is damped hard leaves short-lived lines too.
    buzz: fit.modes.some(mode => mode.otherShape.length > 0) && buzzing.length >= BUZZ_LINES && findings.explainedShare < 0.9,
  }
}

/** The likeliest cause of a line that no mode explains, in plain words; undefined where none is likely. Frequencies in Hz. */
export function likelyCause(line: SpectralLine, { fit, matched, struck, longestT60S, buzz }: CauseFacts): string | undefined {
  const hz = line.frequencyHz
  const mains = MAINS_HZ.some(f => hz > f - 1 && Math.abs(hz / f - Math.round(hz / f)) * f < MAINS_WITHIN_HZ)
  if (line.steady) return mains ? 'mains hum' : 'a steady tone in the room'
  if (mains && t60Of(line) > HUM_T60_S) return 'mains hum'
  const off = (frequencyHz: number) => Math.abs(Math.log(hz / frequencyHz))
  if (t60Of(line) > RINGS_LONGER * longestT60S && longestT60S > 0) return 'another drum ringing'
  const louder = matched.flatMap(match => match.lines.map(l => ({ ...match, line: l.line }))).filter(({ line: other }) => other.levelDb > line.levelDb)
  if (louder.some(({ mode, line: other }) => mode.m > 0 && !mode.air && off(other.frequencyHz) < PAIR_WITHIN / mode.m && line.levelDb > other.levelDb - 14)) return 'the other half of a pair: the head pulls unevenly'
  const free = fit.modes.filter(mode => !matched.some(match => match.mode === mode))
  if (fit.modes.some(mode => mode.air && off(mode.frequencyHz) < AIR_WITHIN)) return 'the air in the shell'
  if (free.some(mode => mode.head === 'other' && !mode.air && off(mode.frequencyHz) < OTHER_HEAD_WITHIN)) return `the ${struck === 'batter' ? 'resonant' : 'batter'} head`
  if (buzz && hz > BUZZ_FROM_HZ && line.gammaPerS > BUZZ_GAMMA_PER_S) return 'snare wires'
  if (louder.some(({ line: other }) => Math.abs(hz - other.frequencyHz) < RIPPLE_WIDTHS * Math.max(1, other.gammaPerS / Math.PI))) return 'the room, beside a louder tone'
  return undefined
}
