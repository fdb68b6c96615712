import { nearestNote } from '../acoustics'
import {
  createHeadDesign, SAFE_SHARE_OF_YIELD, toneOf, type DesignDrum, type DesignFilm, type DesignTarget, type HeadDesign, type HeadPrediction,
} from './headDesign'

export interface HeadVerdict {
  reachable: boolean
  /** What can be had, said as a luthier would. */
  message: string
  /** A film of the catalogue that does reach the target, when this one does not. */
  otherFilmId: string | null
}

export interface AssessedHead extends HeadVerdict { predicted: HeadPrediction }

/** 'G3 +12 cents'; cents below one are not said. */
export function pitchWords(hz: number): string {
  const note = nearestNote(hz)
  const cents = Math.round(note.cents)
  return `${note.name}${cents ? ` ${cents > 0 ? '+' : '\u2212'}${Math.abs(cents)} cents` : ''}`
}

/** Three significant digits are what a prediction on a drum not yet read supports. */
export function roundHz(hz: number): string {
  return hz < 100 ? hz.toFixed(1) : hz.toFixed(0)
}

const percent = (share: number) => `${share < 0.1 ? (share * 100).toFixed(1) : Math.round(share * 100)} %`
const hzWords = (hz: number) => `${roundHz(hz)} Hz (${pitchWords(hz)})`

/**
 * Predicts a head and says in words whether it can be had. When not: the highest or lowest pitch that this film reaches
 * on this drum at a safe share of yield, and which film of the catalogue reaches what was wanted.
 */
export function assessHead(drum: DesignDrum, film: DesignFilm, catalogue: readonly DesignFilm[], target: DesignTarget): AssessedHead {
  const design = createHeadDesign(drum, film, toneOf(target))
  const range = design.range()
  const predicted = predictOrNearest(design, target)
  const wantedHz = target.kind === 'pitch' ? target.hz : predicted.fundamentalHz
  const tooHigh = target.kind === 'pitch' ? target.hz > range.highestHz : target.nPerM > range.highestNPerM
  const tooLow = target.kind === 'pitch' ? target.hz < range.lowestHz : target.nPerM < range.lowestNPerM
  if (!tooHigh && !tooLow) {
    return { predicted, reachable: true, otherFilmId: null, message: `This can be made. The film will carry ${percent(predicted.shareOfYield)} of its yield stress; at the safe ${percent(SAFE_SHARE_OF_YIELD)} it would sound ${hzWords(range.highestHz)}.` }
  }
  const other = findOtherFilm(drum, film, catalogue, target)
  const bound = tooHigh
    ? `${film.name} reaches at most ${hzWords(range.highestHz)} on this diameter at a safe ${percent(SAFE_SHARE_OF_YIELD)} of its yield stress; ${hzWords(wantedHz)} would take ${percent(predicted.shareOfYield)}.`
    : `${film.name} hangs in wrinkles below ${hzWords(range.lowestHz)} on this diameter; ${hzWords(wantedHz)} is too low for it.`
  const way = other ? `${other.name} would reach it.` : `No film in the catalogue reaches it here: choose a ${tooHigh ? 'lower pitch or a smaller' : 'higher pitch or a larger'} diameter.`
  return { predicted, reachable: false, otherFilmId: other?.id ?? null, message: `${bound} ${way}` }
}

/** Where no tension sounds the pitch, the nearest that the film can do stands in, and the words say so. */
function predictOrNearest(design: HeadDesign, target: DesignTarget): HeadPrediction {
  try {
    return design.predict(target)
  } catch (error) {
    if (!(error instanceof RangeError) || target.kind === 'tension') throw error
    const { lowestHz, lowestNPerM, highestNPerM } = design.range()
    return design.predict({ kind: 'tension', nPerM: target.hz < lowestHz ? lowestNPerM : highestNPerM })
  }
}

/** Of the films that reach the target, the one that carries the smallest share of its yield. */
function findOtherFilm(drum: DesignDrum, film: DesignFilm, catalogue: readonly DesignFilm[], target: DesignTarget): DesignFilm | undefined {
  let best: { film: DesignFilm, share: number } | undefined
  for (const candidate of catalogue) {
    if (candidate.id === film.id) continue
    const design = createHeadDesign(drum, candidate, toneOf(target))
    const { lowestHz, highestHz, lowestNPerM, highestNPerM } = design.range()
    const fits = target.kind === 'pitch' ? target.hz >= lowestHz && target.hz <= highestHz : target.nPerM >= lowestNPerM && target.nPerM <= highestNPerM
    if (!fits) continue
    const share = design.predict(target).shareOfYield
    if (!best || share < best.share) best = { film: candidate, share }
  }
  return best?.film
}
