import type { PredictedMode } from '../../../shared/acoustics'
import { t60FromGamma, type LineFindings } from './lines'
import type { MatchedLines, TensionFit } from './tensionFit'
import type { MatchedMode, UnexplainedPeak } from './types'

/** A line with less weight in the fit than this is listed as unexplained. */
const TRUSTED = 0.1
/** Weaker peaks are of no interest, dB against the strongest line. */
const LEAST_LEVEL_DB = -45
const LONGEST_T60_S = 60
const AIR_CAUSE = 'the air in the shell'
const MAINS_HZ = [50, 60]

const t60 = (gammaPerS: number) => Math.min(LONGEST_T60_S, t60FromGamma(Math.max(gammaPerS, 1e-6)))

/** The modes of a fit as the reading shows them, in order of frequency. */
export function matchedModes(matched: MatchedLines[]): MatchedMode[] {
  const shown = matched.filter(match => match.weight >= TRUSTED && !match.mode.air).map(({ mode, lines, noise }): MatchedMode => {
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

function causeOf(frequencyHz: number, steady: boolean): string | undefined {
  if (!steady) return undefined
  const mains = MAINS_HZ.some(hz => Math.abs(frequencyHz / hz - Math.round(frequencyHz / hz)) * hz < 0.5)
  return mains ? 'mains hum' : 'a steady tone in the room'
}

/** Lines that no mode of the fit explains. */
export function unexplainedPeaks(fit: TensionFit, findings: LineFindings): UnexplainedPeak[] {
  const linesOf = (air: boolean) => new Set(fit.matched.filter(match => match.weight >= TRUSTED && (match.mode.air !== undefined) === air).flatMap(match => match.lines.map(line => line.line)))
  const used = linesOf(false)
  const ofAir = linesOf(true)
  return findings.lines
    .filter(line => !used.has(line) && (line.steady || line.levelDb > LEAST_LEVEL_DB))
    .map(line => ({ frequencyHz: line.frequencyHz, levelDb: line.levelDb, t60S: t60(line.gammaPerS), u95Hz: 2 * line.standardErrorHz, cause: ofAir.has(line) ? AIR_CAUSE : causeOf(line.frequencyHz, line.steady) }))
}
