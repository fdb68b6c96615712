import type { LineFindings, SpectralLine } from './lines'

/** Two taps' lines are one line when nearer than this, Hz, or than a quarter of the line's width. */
const SAME_LINE_HZ = 0.6
const SAME_LINE_WIDTHS = 0.25
/** A line that only one tap of several heard counts from this level on, dB: elsewhere it had a node. */
const LONE_LEVEL_DB = -20

interface Group { lines: SpectralLine[], taps: Set<number> }

/**
 * Makes one set of lines of several taps on the same head.
 *
 * A line heard in several taps gets the mean of its frequencies, weighted by 1 / variance; its error is the weighted one,
 * enlarged by the Birge ratio where the taps disagree by more than their errors say. Its level is the power mean over the
 * taps that heard it, each against its own strongest line.
 * Source: Birge, Phys. Rev. 40 (1932) 207.
 * @param all  findings of each tap; the first sets band and detection levels
 */
export function combineFindings(all: LineFindings[]): LineFindings {
  const first = all[0]!
  if (all.length === 1) return first
  const groups: Group[] = []
  const tagged = all.flatMap((findings, tap) => findings.lines.map(line => ({ line, tap }))).sort((a, b) => a.line.frequencyHz - b.line.frequencyHz)
  for (const { line, tap } of tagged) {
    const group = groups.at(-1)
    if (group && !group.taps.has(tap) && near(group.lines, line)) {
      group.lines.push(line)
      group.taps.add(tap)
    } else groups.push({ lines: [line], taps: new Set([tap]) })
  }
  const kept = groups.filter(g => g.taps.size > 1 || all.length === 1 || g.lines[0]!.levelDb > LONE_LEVEL_DB || g.lines[0]!.steady)
  const lines = kept.map(g => meanLine(g.lines))
  const strongest = Math.max(-300, ...lines.filter(l => !l.steady).map(l => l.levelDb))
  return {
    ...first,
    // The hardest stroke of all.
    glide: all.map(f => f.glide).reduce((a, b) => (!a || (b && b.share > a.share) ? b : a), undefined),
    lines: lines.map(l => ({ ...l, levelDb: l.levelDb - strongest })),
    explainedShare: all.reduce((sum, f) => sum + f.explainedShare, 0) / all.length,
  }
}

function near(lines: SpectralLine[], line: SpectralLine): boolean {
  const centre = lines.reduce((sum, l) => sum + l.frequencyHz, 0) / lines.length
  const widthHz = Math.max(line.gammaPerS, lines[0]!.gammaPerS) / Math.PI
  return Math.abs(line.frequencyHz - centre) < Math.max(SAME_LINE_HZ, SAME_LINE_WIDTHS * widthHz)
}

function meanLine(lines: SpectralLine[]): SpectralLine {
  if (lines.length === 1) return lines[0]!
  const weights = lines.map(l => 1 / Math.max(1e-9, l.standardErrorHz) ** 2)
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = (of: (l: SpectralLine) => number) => lines.reduce((sum, l, i) => sum + weights[i]! * of(l), 0) / total
  const frequencyHz = mean(l => l.frequencyHz)
  const scatter = lines.reduce((sum, l, i) => sum + weights[i]! * (l.frequencyHz - frequencyHz) ** 2, 0) / (lines.length - 1)
  const power = lines.reduce((sum, l) => sum + 10 ** (l.levelDb / 10), 0) / lines.length
  const loudest = lines.reduce((a, b) => (b.amplitude > a.amplitude ? b : a))
  return {
    frequencyHz,
    standardErrorHz: Math.sqrt(Math.max(1, scatter) / total),
    amplitude: loudest.amplitude,
    levelDb: 10 * Math.log10(power),
    gammaPerS: mean(l => l.gammaPerS),
    phaseRad: loudest.phaseRad,
    steady: lines.every(l => l.steady),
  }
}
