import { chooseChannel, type MonoSound } from './channel'
import { combineFindings } from './combine'
import { toLowBand, type LowBand } from './decimate'
import type { ExplainLines, Explanation } from './explanation'
import { displaySpectrum, waveformColumns } from './figures'
import type { LineFindings } from './lines'
import { hearTap, type HeardTap } from './listen'
import { explainLines } from './matching'
import { RefusalError } from './refusal'
import { CLIPPED_SHARE, clippingOf, judgeClipping, longEnough, refuseEmpty, refuseNoTap, refuseOtherSounds, refuseShortRing, ringsLikeDrum, startsLikeTap } from './refusals'
import { cutRing } from './ring'
import { findTaps, type Tap } from './taps'
import type { AnalysedReading, ReadingWarning, SoundFacts } from '../../../shared/types/reading'
import type { AnalysisOutcome, AnalysisRequest } from './types'
import { ANALYSIS_VERSION } from './version'
import { readWav, type DecodedSound } from './wav'

/** Taps looked at, and of these heard, at most: two rounds of a 16-rod drum; of other recordings the best few. */
const MOST_TAPS = { round: 32, centre: 8, edge: 8 }
const MOST_HEARD = { round: 32, centre: 3, edge: 3 }
/** A tap softer than the loudest by more than this is heard only in a round, power ratio. */
const MUCH_SOFTER = 0.03
/** A glide that is worth telling of, share of the pitch. */
const LOUD_GLIDE = 0.01
const SPECTRUM_ABOVE_HIGHEST = 1.15

/**
 * Reads a recording: WAV, channel, taps, lines of each tap, tension of the head.
 *
 * Refuses with a RefusalError inside, which comes out as an outcome of kind 'refused'; sound is null where the file
 * itself could not be read.
 * @param request  the file, the instrument and where it was struck; SI
 * @param explain  the step from lines to tension
 */
export function analyseRecording(request: AnalysisRequest, explain: ExplainLines = explainLines): AnalysisOutcome {
  const clock = stopwatch()
  let facts: SoundFacts | null = null
  try {
    const decoded = clock.time('decode', () => readWav(request.wav))
    const sound = clock.time('channel', () => chooseChannel(decoded))
    facts = clock.time('waveform', () => factsOf(decoded, sound))
    refuseEmpty(sound)
    const band = clock.time('taps', () => toLowBand(sound.samples, sound.sampleRateHz))
    const taps = clock.time('taps', () => findTaps(band))
    refuseNoTap(taps)
    const { heard, warnings } = clock.time('lines', () => hearTaps(request, sound, band, taps))
    const findings = clock.time('lines', () => combineFindings(heard.map(h => h.findings)))
    const explanation = clock.time('matching', () => explain(findings, request))
    facts.spectrum = clock.time('spectrum', () => displaySpectrum(heard[0]!.ring, highestHz(explanation, findings)))
    return { kind: 'read', sound: facts, reading: readingOf(request, taps, explanation, warnings, findings), timingsMs: clock.timingsMs }
  } catch (error) {
    if (!(error instanceof RefusalError)) throw error
    return { kind: 'refused', sound: facts, refusal: error.toRefusal(), timingsMs: clock.timingsMs }
  }
}

/** The taps worth reading, best first. */
function hearTaps(request: AnalysisRequest, sound: MonoSound, band: LowBand, taps: Tap[]): { heard: HeardTap[], warnings: ReadingWarning[] } {
  const loudest = Math.max(...taps.map(t => t.peakPower))
  const clear = taps.map(tap => ({ tap, clipping: clippingOf(sound, tap) }))
    .filter(({ tap }) => request.strike === 'round' || tap.peakPower > MUCH_SOFTER * loudest)
    .sort((a, b) => a.clipping.share - b.clipping.share || worth(b.tap) - worth(a.tap))
  const warnings = judgeClipping(clear[0]!.clipping)
  const rings = clear
    .filter(c => c.clipping.share <= Math.max(CLIPPED_SHARE, clear[0]!.clipping.share))
    .slice(0, MOST_TAPS[request.strike])
    .map(({ tap }) => ({ tap, ring: cutRing(band, tap) }))
  refuseShortRing(Math.max(...rings.map(r => r.ring.availableS)))
  const starting = rings.filter(({ tap, ring }) => longEnough(ring.availableS) && startsLikeTap(band, tap, ring))
  refuseOtherSounds(starting.length, rings.length)
  const heard = starting.slice(0, MOST_HEARD[request.strike]).map(({ tap, ring }) => hearTap(band, tap, ring))
  const good = heard.filter(h => ringsLikeDrum(h.findings))
  refuseOtherSounds(good.length, heard.length)
  if (good.some(h => h.tap.doubled)) warnings.push({ code: 'bounced', message: 'The stick or finger bounced. The reading is from after the last contact; a clean single tap is better.' })
  const [best] = good
  if (best && best.glideShare > LOUD_GLIDE) warnings.push({ code: 'pitch-glide', message: `The stroke was loud enough to raise the pitch by ${(100 * best.glideShare).toFixed(0)} % at first; the tension is read ${best.delayS > 0 ? `${best.delayS} s later, nearer to rest` : 'at rest, with the rise taken off'}. Tap more softly.` })
  else if (best && best.delayS > 0) warnings.push({ code: 'heard-late', message: `The first ${best.delayS} s of the ring were left out: the room or the stroke was too loud there. Tap softly, with the microphone closer.` })
  return { heard: good, warnings }
}

/** Loud and with room to ring: what makes a tap worth reading. */
const worth = (tap: Tap) => tap.peakPower * Math.min(1, tap.endS - tap.lastHitS) ** 2 * (tap.doubled ? 0.3 : 1)

function readingOf(request: AnalysisRequest, taps: Tap[], explanation: Explanation, warnings: ReadingWarning[], { glide }: LineFindings): AnalysedReading {
  const round = request.strike === 'round'
  const { rodCount } = request.instrument
  const all = [...explanation.warnings, ...warnings]
  if (round) {
    all.push({ code: 'rim-not-read', message: 'Rod-by-rod reading of a round is not available in this version; the tension is the mean from all taps.' })
    if (taps.length !== rodCount) all.push({ code: 'round-count', message: `${taps.length} taps were found for ${rodCount} rods. Tap once at every rod, in order, and let each tap ring.` })
  }
  const rodOf = (tap: number) => {
    if (round) return rodCount > 0 ? (request.firstRod - 1 + tap) % rodCount + 1 : null
    return request.strike === 'edge' ? request.rod ?? null : null
  }
  return {
    ...explanation,
    analysisVersion: ANALYSIS_VERSION,
    taps: taps.map((tap, i) => ({ atS: Math.round(tap.atS * 1e4) / 1e4, rod: rodOf(i) })),
    rim: null,
    ...glide && { glide },
    warnings: all,
  }
}

function factsOf(decoded: DecodedSound, sound: MonoSound): SoundFacts {
  return {
    durationS: decoded.durationS,
    sampleRateHz: decoded.sampleRateHz,
    channels: decoded.channels.length,
    bitDepth: decoded.bitDepth,
    peakDbfs: Math.round(200 * Math.log10(Math.max(1e-10, sound.peak))) / 10,
    waveform: waveformColumns(sound.samples),
    spectrum: null,
  }
}

/** Upper end of the drawn spectrum, Hz: a little above the highest matched line. */
function highestHz(explanation: Explanation, findings: LineFindings): number {
  const matched = Math.max(0, ...explanation.modes.map(mode => mode.measuredHz))
  return Math.min(findings.toHz, Math.max(300, SPECTRUM_ABOVE_HIGHEST * (matched || findings.toHz)))
}

function stopwatch() {
  const timingsMs: Record<string, number> = {}
  return {
    timingsMs,
    time<T>(step: string, work: () => T): T {
      const start = performance.now()
      try {
        return work()
      } finally {
        timingsMs[step] = Math.round(100 * ((timingsMs[step] ?? 0) + performance.now() - start)) / 100
      }
    },
  }
}
