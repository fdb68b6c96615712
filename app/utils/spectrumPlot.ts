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
 * Flags stand on their peaks, lowest peaks placed first. A label hangs to the right of its pole, or to the left where that
 * is taken; where both lie on another label or across another pole, it climbs half a line at a time.
 */
export function placeFlags(flags: readonly Flag[], room: FlagRoom): PlacedFlag[] {
  const placed: (PlacedFlag & { left: number, right: number })[] = []
  const extent = (flag: Flag, anchor: 'start' | 'end') => anchor === 'start'
    ? { left: flag.x - 2, right: flag.x + room.gap + room.labelWidth }
    : { left: flag.x - room.gap - room.labelWidth, right: flag.x + 2 }
  const isFree = (flag: Flag, labelY: number, { left, right }: { left: number, right: number }) => right <= room.rightX && left >= 0
    && placed.every((other) => {
      const onLabel = Math.abs(other.labelY - labelY) < room.lineHeight && left < other.right && right > other.left
      const onItsPole = other.x > left && other.x < right && labelY > other.labelY - room.lineHeight && labelY - room.lineHeight < other.peakY
      const poleOnItsLabel = flag.x > other.left && flag.x < other.right && other.labelY > labelY && other.labelY - room.lineHeight < flag.peakY
      return !onLabel && !onItsPole && !poleOnItsLabel
    })
    // Nor across the poles of flags still to come, which start at their peaks.
    && flags.every(other => other.key === flag.key || other.x < left || other.x > right || labelY < other.peakY - 2.6 * room.lineHeight || labelY - room.lineHeight > other.peakY)
  for (const flag of [...flags].sort((a, b) => b.peakY - a.peakY || a.x - b.x)) {
    let best: { labelY: number, anchor: 'start' | 'end' } | undefined
    for (let labelY = flag.peakY - room.lineHeight * 1.4; labelY > room.topY && !best; labelY -= room.lineHeight / 2) {
      const anchor = (['start', 'end'] as const).find(side => isFree(flag, labelY, extent(flag, side)))
      if (anchor) best = { labelY, anchor }
    }
    const { labelY, anchor } = best ?? { labelY: room.topY, anchor: flag.x + room.labelWidth > room.rightX ? 'end' as const : 'start' as const }
    placed.push({ ...flag, labelY, anchor, ...extent(flag, anchor) })
  }
  return placed.map(({ left: _left, right: _right, ...flag }) => flag)
}
