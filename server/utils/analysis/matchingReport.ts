import type { PredictedMode } from '../../../shared/acoustics'
import { t60FromGamma, type LineFindings } from './lines'
import type { MatchedLines, TensionFit } from './tensionFit'
import { causeFacts, likelyCause } from './matchingCauses'
import type { HeadSide, MatchedMode, UnexplainedPeak } from '../../../shared/types/reading'

/** A line with less weight in the fit than this is listed as unexplained. */
const TRUSTED = 0.1
/** Weaker peaks are of no interest, dB against the strongest line. */
const LEAST_LEVEL_DB = -45
const LONGEST_T60_S = 60

const t60 = (gammaPerS: number) => Math.min(LONGEST_T60_S, t60FromGamma(Math.max(gammaPerS, 1e-6)))

/** A line that may be off by more than this share of its frequency (95 %) names nothing. */
const MOST_UNSURE = 0.03

/** What of a fit's matches deserves a name: trusted, of a head, and known where it lies. */
function shownMatches(matched: MatchedLines[]): MatchedLines[] {
  return matched.filter(match => match.weight >= TRUSTED && !match.mode.air && 2 * match.noise < MOST_UNSURE)
}

/** The modes of a fit as the reading shows them, in order of frequency. */
export function matchedModes(matched: MatchedLines[]): MatchedMode[] {
  const shown = shownMatches(matched).map(({ mode, lines, noise }): MatchedMode => {
    const strongest = lines.reduce((a, b) => (b.levelDb > a.levelDb ? b : a)).line
    const measuredHz = lines.reduce((sum, line) => sum + line.line.frequencyHz, 0) / lines.length
    const undamped = Math.max(mode.frequencyHz ** 2 - (strongest.gammaPerS / (2 * Math.PI)) ** 2, 0)
    const pair = lines.map(line => line.line.frequencyHz).sort((a, b) => a - b)
    return {
      m: mode.m, n: mode.n, measuredHz,
      u95Hz: 2 * noise * measuredHz,
      predictedHz: Math.sqrt(undamped),
      levelDb: strongest.levelDb,
      t60S: t60(strongest.gammaPerS),
      ...(pair.length > 1 ? { splitHz: [pair[0]!, pair[1]!] as [number, number] } : {}),
      ...(mode.head === 'other' ? { head: 'other' as const } : {}),
      ...branchOf(mode),
    }
  })
  return shown.sort((a, b) => a.measuredHz - b.measuredHz)
}

/** Which way the heads of a double-headed drum move in a mode that moves both in the same shape; nothing for other modes. */
function branchOf({ m, n, struckShape, otherShape }: PredictedMode): Pick<MatchedMode, 'branch'> {
  if (m !== 0 || otherShape.length === 0) return {}
  return { branch: struckShape[n - 1]! * otherShape[n - 1]! > 0 ? 'in-phase' : 'against' }
}

/** Lines that no mode of the fit explains, with a likely cause where there is one. */
export function unexplainedPeaks(fit: TensionFit, findings: LineFindings, struck: HeadSide): UnexplainedPeak[] {
  const used = new Set(shownMatches(fit.matched).flatMap(match => match.lines.map(line => line.line)))
  const left = findings.lines.filter(line => !used.has(line) && (line.steady || line.levelDb > LEAST_LEVEL_DB))
  const facts = causeFacts(fit, findings, left, struck)
  return left.map((line) => {
    const cause = likelyCause(line, facts)
    return { frequencyHz: line.frequencyHz, levelDb: line.levelDb, t60S: t60(line.gammaPerS), u95Hz: 2 * line.standardErrorHz, ...(cause ? { cause } : {}) }
  })
}
