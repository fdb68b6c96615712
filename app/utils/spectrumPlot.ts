import { max, min, range } from 'd3-array'
import type { ModeView, SoundFacts } from './readingParts'

export interface Spectrum { fromHz: number, stepHz: number, levelDb: number[] }

/** The part of the spectrum worth drawing: all matched modes with room for their flags on both sides. */
export function spectrumRange(modes: readonly ModeView[], spectrum: NonNullable<SoundFacts['spectrum']>): { fromHz: number, toHz: number } {
  const endHz = spectrum.fromHz + spectrum.stepHz * (spectrum.levelDb.length - 1)
  const low = min(modes, mode => Math.min(mode.measuredHz, mode.predictedHz))
  const high = max(modes, mode => Math.max(mode.measuredHz, mode.predictedHz))
  if (low === undefined || high === undefined) return { fromHz: spectrum.fromHz, toHz: Math.min(endHz, 1000) }
  const toHz = Math.min(endHz, high * 1.12 + 20)
  return { fromHz: Math.max(spectrum.fromHz, Math.min(low * 0.5, low - 0.06 * (toHz - low))), toHz }
}

/** One point a column, the strongest level in it, so that a narrow peak never falls between two columns. */
export function spectrumColumns(spectrum: Spectrum, fromHz: number, toHz: number, columns: number): { hz: number, db: number }[] {
  const first = Math.max(0, Math.ceil((fromHz - spectrum.fromHz) / spectrum.stepHz))
  const last = Math.min(spectrum.levelDb.length - 1, Math.floor((toHz - spectrum.fromHz) / spectrum.stepHz))
  const bins = range(first, last + 1)
  const perColumn = Math.max(1, Math.floor(bins.length / columns))
  const points: { hz: number, db: number }[] = []
  for (let start = first; start <= last; start += perColumn) {
    let best = start
    for (let bin = start + 1; bin < Math.min(start + perColumn, last + 1); bin++) {
      if (spectrum.levelDb[bin]! > spectrum.levelDb[best]!) best = bin
    }
    points.push({ hz: spectrum.fromHz + best * spectrum.stepHz, db: spectrum.levelDb[best]! })
  }
  return points
}

export interface Flag { key: string, x: number, peakY: number }
/** Not labelled: there was no room; the pole still marks the peak. */
export interface PlacedFlag extends Flag { labelY: number, anchor: 'start' | 'end', labelled: boolean }

export interface FlagRoom {
  labelWidth: number
  lineHeight: number
  topY: number
  rightX: number
  gap: number
  /** Highest point (smallest y) of the curve between two x. */
  curveTopY: (left: number, right: number) => number
}

interface Span { left: number, right: number }

/**
 * Flags stand on their peaks, the strongest placed first. A label hangs to the right of its pole or to the left, clear of
 * the curve, of other labels and of other poles; where it is not, it climbs half a line at a time, and goes without a
 * label when it reaches the top.
 */
export function placeFlags(flags: readonly Flag[], room: FlagRoom): PlacedFlag[] {
  const placed: (PlacedFlag & Span)[] = []
  const spanOf = (flag: Flag, anchor: 'start' | 'end'): Span => anchor === 'start'
    ? { left: flag.x - 2, right: flag.x + room.gap + room.labelWidth }
    : { left: flag.x - room.gap - room.labelWidth, right: flag.x + 2 }
  const barePoleTop = (flag: Flag) => flag.peakY - room.lineHeight * 1.6

  const isFree = (flag: Flag, labelY: number, span: Span) => {
    if (span.left < 0 || span.right > room.rightX || labelY > room.curveTopY(span.left, span.right) - 3) return false
    return flags.every((other) => {
      if (other.key === flag.key) return true
      const done = placed.find(entry => entry.key === other.key)
      const poleTop = done?.labelled ? done.labelY - room.lineHeight : barePoleTop(other)
      const acrossItsPole = other.x > span.left && other.x < span.right && labelY > poleTop && labelY - room.lineHeight < other.peakY
      if (acrossItsPole || !done?.labelled) return !acrossItsPole
      const onItsLabel = Math.abs(done.labelY - labelY) < room.lineHeight && span.left < done.right && span.right > done.left
      const poleThroughIt = flag.x > done.left && flag.x < done.right && done.labelY > labelY && done.labelY - room.lineHeight < flag.peakY
      return !onItsLabel && !poleThroughIt
    })
  }

  for (const flag of [...flags].sort((a, b) => a.peakY - b.peakY || a.x - b.x)) {
    let best: { labelY: number, anchor: 'start' | 'end' } | undefined
    for (let labelY = flag.peakY - room.lineHeight * 0.9; labelY > room.topY && !best; labelY -= room.lineHeight / 2) {
      const anchor = (['start', 'end'] as const).find(side => isFree(flag, labelY, spanOf(flag, side)))
      if (anchor) best = { labelY, anchor }
    }
    const { labelY, anchor } = best ?? { labelY: barePoleTop(flag) + 9, anchor: flag.x + room.labelWidth > room.rightX ? 'end' as const : 'start' as const }
    placed.push({ ...flag, labelY, anchor, labelled: best !== undefined, ...spanOf(flag, anchor) })
  }
  return placed.map(({ left: _left, right: _right, ...flag }) => flag)
}
