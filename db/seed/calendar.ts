import type { SeededRandom } from './random'

const DAY_MS = 24 * 3600_000

/** One visit of a drum to the bench: the tension found, and whether it is brought back to its wanted one. */
export interface Visit { at: Date, tensionNPerM: number, temperatureC: number, retuned: boolean }

export interface CalendarOptions { now: Date, wantedNPerM: number, visits: number, /** Loss of tension in a year, relative. */ yearlyLoss: number }

/** A workshop that is warmer in July than in January, by the day of the year. */
const roomTemperatureC = (at: Date, random: SeededRandom) => {
  const yearShare = (at.getTime() / DAY_MS % 365.25) / 365.25
  return Math.round(19.5 - 3 * Math.cos(2 * Math.PI * yearShare) + random.normal())
}

/**
 * Two years of visits: film creeps, so the tension found falls from one visit to the next; now and then the maker turns
 * the rods, and the visit right after shows the wanted tension again. Newest last, all before now.
 */
export function visitsOf({ now, wantedNPerM, visits, yearlyLoss }: CalendarOptions, random: SeededRandom): Visit[] {
  const list: Visit[] = []
  const gapDays = 720 / visits
  let daysAgo = 700 + random.between(0, 25)
  let share = random.between(0.9, 1.04)
  let justTurned = false
  while (daysAgo > 1 && list.length < visits) {
    const at = new Date(now.getTime() - daysAgo * DAY_MS)
    // Benches work from eight to six.
    at.setUTCHours(8 + Math.floor(random.uniform() * 10), Math.floor(random.uniform() * 60), Math.floor(random.uniform() * 60))
    const retuned: boolean = !justTurned && Math.abs(share - 1) > 0.035
    list.push({ at, tensionNPerM: wantedNPerM * share, temperatureC: roomTemperatureC(at, random), retuned })
    const step = retuned ? random.between(0.01, 0.05) : gapDays * random.between(0.6, 1.4)
    share = retuned ? 1 + 0.006 * random.normal() : share - yearlyLoss * step / 365 + 0.002 * random.normal()
    justTurned = retuned
    daysAgo -= step
  }
  return list
}
