import { max, min, range } from 'd3-array'
import type { ModeView, SoundView } from '~/utils/readingParts'

export interface Spectrum { fromHz: number, stepHz: number, levelDb: number[] }

/** The part of the spectrum worth drawing: all matched modes with room for their flags on both sides. */
export function spectrumRange(modes: readonly ModeView[], spectrum: NonNullable<SoundView['spectrum']>): { fromHz: number, toHz: number } {
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
export interface PlacedFlag extends Flag { labelY: number, anchor: 'start' | 'end' }

interface FlagRoom { labelWidth: number, lineHeight: number, topY: number, rightX: number, gap: number }

/**
 * Flags stand on their peaks; where a label would lie on another label or on another flag's pole, it climbs a line at a
 * time. At the right edge it hangs to the left of its pole.
 */
export function placeFlags(flags: readonly Flag[], room: FlagRoom): PlacedFlag[] {
  const placed: (PlacedFlag & { left: number, right: number })[] = []
  for (const flag of [...flags].sort((a, b) => b.peakY - a.peakY || a.x - b.x)) {
    const anchor = flag.x + room.gap + room.labelWidth > room.rightX ? 'end' as const : 'start' as const
    const left = anchor === 'start' ? flag.x - 2 : flag.x - room.gap - room.labelWidth
    const right = anchor === 'start' ? flag.x + room.gap + room.labelWidth : flag.x + 2
    let labelY = flag.peakY - room.lineHeight * 1.4
    const blocked = () => placed.some((other) => {
      const sameRow = Math.abs(other.labelY - labelY) < room.lineHeight && left < other.right && right > other.left
      const poleThroughLabel = flag.x > other.left && flag.x < other.right && other.labelY > labelY && other.labelY < flag.peakY
      const labelOnPole = other.x > left && other.x < right && labelY > other.labelY - room.lineHeight && labelY < other.peakY
      return sameRow || labelOnPole || (poleThroughLabel && other.x !== flag.x)
    })
    while (labelY > room.topY && blocked()) labelY -= room.lineHeight * 0.5
    placed.push({ ...flag, labelY: Math.max(room.topY, labelY), anchor, left, right })
  }
  return placed.map(({ left: _left, right: _right, ...flag }) => flag)
}
