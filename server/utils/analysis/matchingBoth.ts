import type { AnalysedReading, BothHeadsReading, HeadSide, HeadTension, MatchedMode, PairTone, ReadingWarning } from '../../../shared/types/reading'
import { studentT95 } from './budget'
import type { ExplainRequest } from './explanation'
import { fitBoth, type BothFit, type Ear } from './matchingBothFit'
import { matchingContext } from './matchingContext'
import { scoreInput } from './matchingInput'
import { matchedModes } from './matchingReport'
import type { LineFindings, SpectralLine } from './lines'
import { gainsOn } from './tensionSolve'
import { stateFrom } from './tensionFit'
import type { AnalysedInstrument, Strike } from './types'
import { ANALYSIS_VERSION } from './version'

/** A stored reading of one tap on a double-headed drum, as far as reading both heads together needs it. */
export interface TappedReading {
  /** The head that was tapped. */
  side: HeadSide
  strike: Strike
  centreDamped: boolean
  temperatureC: number
  reading: Pick<AnalysedReading, 'tension' | 'modes' | 'unexplained' | 'twoHeads' | 'runnerUp'>
}

const LN_1000 = Math.log(1000)
/** What an unexplained tone is taken to be uncertain by where the reading does not say, Hz, one standard deviation. */
const UNKNOWN_STANDARD_HZ = 0.15
/** Lines below this were not stored, dB. */
const FLOOR_DB = -40
const TEMPER = 0.5
const DOUBTFUL_ODDS = 8
const DOUBTFUL_SCATTER = 2
const DOUBTFUL_EXPLAINED = 0.65
const DIFFERENT = 0.03
const LEAST_REPEATABILITY = 0.0003

/**
 * Reads both heads of a drum together, from one stored reading of a tap on each: tensions that explain the tones of both
 * taps at once, with the air and the edge in common.
 *
 * @param instrument  a double-headed drum, SI; its calibration, which is of one head, is left out
 * @param taps        at least one on each head
 * @throws RangeError when the drum has not two heads or a head was not tapped
 */
export function readBothHeads(instrument: AnalysedInstrument, taps: TappedReading[]): BothHeadsReading {
  const batterTaps = taps.filter(tap => tap.side === 'batter')
  const resonantTaps = taps.filter(tap => tap.side === 'resonant')
  if (instrument.construction !== 'double-headed' || instrument.heads.length < 2) throw new RangeError('only a drum with two heads can be read from both')
  if (batterTaps.length === 0 || resonantTaps.length === 0) throw new RangeError('a tap on each head is needed')
  // The first ear sets which head the fit calls its own.
  const ears = [...batterTaps, ...resonantTaps].map(tap => earOf(instrument, tap))
  const fits = starts(batterTaps, resonantTaps).map(([batter, resonant]) => fitBoth(ears, stateFrom(ears[0]!.context, Math.log(batter), Math.log(resonant))))
  fits.sort((a, b) => b.score - a.score)
  return bothReading(ears, fits)
}

function earOf(instrument: AnalysedInstrument, tap: TappedReading): Ear {
  const { side, strike, centreDamped, temperatureC } = tap
  const request: ExplainRequest = { instrument: { ...instrument, calibration: undefined }, side, strike, centreDamped, temperatureC, firstRod: 1 }
  const context = matchingContext(request)
  return { side, context, input: scoreInput(context, storedFindings(tap), request) }
}

/** A reading's tones as lines again: both lines of a pair, and what no mode explained. */
function storedFindings({ reading }: TappedReading): LineFindings {
  const line = (frequencyHz: number, standardErrorHz: number, levelDb: number, t60S: number): SpectralLine =>
    ({ frequencyHz, standardErrorHz, amplitude: 10 ** (levelDb / 20), levelDb, gammaPerS: LN_1000 / t60S, phaseRad: 0, steady: false })
  const lines = [
    ...reading.modes.flatMap(mode => (mode.splitHz ?? [mode.measuredHz]).map(hz => line(hz, mode.u95Hz / 2, mode.levelDb, mode.t60S))),
    ...reading.unexplained.filter(peak => !peak.cause || NOT_OF_THE_ROOM.test(peak.cause)).map(peak => line(peak.frequencyHz, (peak.u95Hz ?? 2 * UNKNOWN_STANDARD_HZ) / 2, peak.levelDb, peak.t60S)),
  ].sort((a, b) => a.frequencyHz - b.frequencyHz)
  const highest = Math.max(...lines.map(l => l.frequencyHz))
  return { lines, fromHz: 20, toHz: 1.3 * highest, detection: { stepHz: highest, levelDb: [FLOOR_DB, FLOOR_DB] }, explainedShare: 1 }
}

/** Causes, as matchingCauses names them, that are the drum itself. */
const NOT_OF_THE_ROOM = /head$|^the air|^the other half/

/** Tensions of batter and resonant head to start from, N/m: each reading's own word, and its runner-up's. */
function starts(batter: TappedReading[], resonant: TappedReading[]): Array<[number, number]> {
  const tensions = (taps: TappedReading[]) => taps.flatMap(({ reading }) => [reading.tension.nPerM, ...(reading.runnerUp ? [reading.runnerUp.tensionNPerM] : [])])
  const others = (taps: TappedReading[]) => taps.flatMap(({ reading }) => (reading.twoHeads ? [reading.twoHeads.other.nPerM] : []))
  const found: Array<[number, number]> = []
  for (const b of [...tensions(batter), ...others(resonant)]) {
    for (const r of [...tensions(resonant), ...others(batter)]) {
      if (!found.some(([x, y]) => Math.abs(Math.log(x / b)) < DIFFERENT / 2 && Math.abs(Math.log(y / r)) < DIFFERENT / 2)) found.push([b, r])
    }
  }
  return found
}

function bothReading(ears: Ear[], fits: BothFit[]): BothHeadsReading {
  const best = fits[0]!
  const modeRows = best.rows.filter(row => row.source.kind === 'mode')
  const freedom = 5 + Math.max(0, modeRows.length - 2)
  const scatter = Math.sqrt((5 + modeRows.reduce((sum, row) => sum + (row.residual / row.error) ** 2, 0)) / freedom)
  const rival = fits.find(fit => Math.max(Math.abs(fit.state.lnTension - best.state.lnTension), Math.abs(fit.state.lnOther - best.state.lnOther)) > DIFFERENT)
  const odds = rival ? Math.exp(TEMPER * (best.score - rival.score)) : Infinity
  const trusted = best.heard.map(({ matched }) => matched.filter(match => match.weight > 0.3))
  const explained = Math.min(...trusted.map(matched => matched.reduce((sum, match) => sum + match.lines.reduce((s, l) => s + l.share, 0), 0)))
  const few = trusted.some(matched => matched.length < 2)
  const poor = scatter > DOUBTFUL_SCATTER || explained < DOUBTFUL_EXPLAINED
  const head = (column: 0 | 1, lnTension: number): HeadTension => {
    const variance = best.covariance[column * best.size + column]!
    const gains = gainsOn(column, best.rows, best.covariance)
    const noise = Math.sqrt(best.rows.reduce((sum, row, i) => sum + (row.source.kind === 'mode' ? (gains[i]! * Math.hypot(row.source.noise, row.source.uneven)) ** 2 : 0), 0))
    const nPerM = Math.exp(lnTension)
    return { nPerM, u95NPerM: studentT95(30) * Math.sqrt(variance) * Math.max(1, scatter) * nPerM, repeatabilityU95NPerM: studentT95(30) * Math.hypot(noise, LEAST_REPEATABILITY) * nPerM }
  }
  const modes = ears.flatMap((ear, e) => matchedModes(best.heard[e]!.matched).map(mode => ({ ...mode, tapped: ear.side, side: sideOf(mode, ear.side) })))
  return {
    analysisVersion: ANALYSIS_VERSION,
    batter: head(0, best.state.lnTension),
    resonant: head(1, best.state.lnOther),
    correlation: best.covariance[1]! / Math.sqrt(best.covariance[0]! * best.covariance[best.size + 1]!),
    pair: { inPhase: pairTone(best, modes, 'in-phase'), against: pairTone(best, modes, 'against') },
    modes: modes.sort((a, b) => a.measuredHz - b.measuredHz),
    confidence: Math.round(1000 * (odds === Infinity ? 1 : odds / (1 + odds)) * Math.min(1, explained / 0.9) * (few ? 0.5 : 1)) / 1000,
    doubtful: few || poor || odds < DOUBTFUL_ODDS,
    warnings: warningsFor({ few, poor, close: odds < DOUBTFUL_ODDS }),
  }
}

const sideOf = (mode: MatchedMode, tapped: HeadSide): HeadSide => ((mode.head === 'other') === (tapped === 'batter') ? 'resonant' : 'batter')

/** One of the two tones (0,1), as the louder tap heard it, and as predicted. */
function pairTone(best: BothFit, modes: MatchedMode[], branch: 'in-phase' | 'against'): PairTone {
  const heard = modes.filter(mode => mode.n === 1 && mode.branch === branch).reduce<MatchedMode | null>((a, b) => (!a || b.levelDb > a.levelDb ? b : a), null)
  const lowest = best.heard[0]!.modes.filter(mode => mode.m === 0 && !mode.air).slice(0, 2)
  const predicted = lowest.find(mode => (Math.sign(mode.struckShape[0]! * (mode.otherShape[0] ?? 0)) >= 0) === (branch === 'in-phase')) ?? lowest[branch === 'in-phase' ? 0 : 1]
  return { measuredHz: heard?.measuredHz ?? null, predictedHz: predicted?.frequencyHz ?? heard?.predictedHz ?? 0 }
}

function warningsFor({ few, poor, close }: { few: boolean, poor: boolean, close: boolean }): ReadingWarning[] {
  const warnings: ReadingWarning[] = []
  if (few) warnings.push({ code: 'few-modes', message: 'One of the two taps gave a single tone. Tap that head again, softly, three quarters of the way out, with the other head free.' })
  if (poor) warnings.push({ code: 'poor-fit', message: 'The two taps do not fit one pair of tensions well. Tap both heads again without touching a rod in between, and check diameter, depth and films.' })
  if (close) warnings.push({ code: 'close-runner-up', message: 'Another pair of tensions explains both taps almost as well. Tap each head once more, at another rod.' })
  return warnings
}
