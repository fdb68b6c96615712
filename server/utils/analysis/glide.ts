import type { LineFindings, SpectralLine } from './lines'

/** Steps of a glide: each line stands this much above the one below it, as a share of its frequency. */
const LEAST_STEP = 0.008
const MOST_STEP = 0.09
/** Two steps alone must be this close; wider apart they are two modes of which air damps the upper one harder. */
const MOST_STEP_OF_TWO = 0.04
/** Each line dies this much faster than the one below it. */
const FASTER = 1.25
const LOUD_DB = -22
/** The flight holds at least this share of all lines' energy: in a hall, chance makes flights of ripples. */
const MOST_OF_ENERGY = 0.5

/**
 * Lines that are not modes but one mode gliding down: a loud stroke stretches the film, the pitch falls as the ring dies,
 * and a fit of constant tones follows it with a flight of lines, each lower and slower to die than the last.
 *
 * Only a flight that holds one of the strongest lines counts. Two lines of a pair die alike and are none.
 * @returns the flight, lowest first; empty where there is none
 */
export function glideOf(findings: LineFindings): SpectralLine[] {
  const loud = findings.lines.filter(l => !l.steady && l.levelDb > LOUD_DB)
  for (let first = 0; first < loud.length; first++) {
    const flight = [loud[first]!]
    for (const line of loud.slice(first + 1)) {
      const last = flight.at(-1)!
      const step = line.frequencyHz / last.frequencyHz - 1
      if (step > MOST_STEP) break
      if (step > LEAST_STEP && line.gammaPerS > FASTER * last.gammaPerS) flight.push(line)
    }
    const strong = flight.some(l => l.levelDb > -3)
    const close = flight.length === 2 && flight[1]!.frequencyHz / flight[0]!.frequencyHz - 1 < MOST_STEP_OF_TWO
    const share = energyOf(flight) / energyOf(findings.lines.filter(l => !l.steady))
    if (strong && (flight.length > 2 || close) && share > MOST_OF_ENERGY) return flight
  }
  return []
}

/** Sum of amplitude^2 / gamma: the energy of decaying lines up to a factor, full scale squared times s. */
function energyOf(lines: SpectralLine[]): number {
  return lines.reduce((sum, l) => sum + l.amplitude ** 2 / Math.max(l.gammaPerS, 0.5), 0)
}
