import type { SeededRandom } from './random'

const DAY_MS = 24 * 3600_000

/** One visit of a drum to the bench: the tension found, and whether it is brought back to its wanted one. */
export interface Visit { at: Date, tensionNPerM: number, temperatureC: number, retuned: boolean }

export interface CalendarOptions { now: Date, wantedNPerM: number, visits: number, /** Loss of tension in a year, relative. */ yearlyLoss: number }

/** A workshop that is warmer in July than in January, read off a coarse thermometer; few temperatures make the demo load fast. */
const roomTemperatureC = (at: Date, random: SeededRandom) => {
  const yearShare = (at.getTime() / DAY_MS % 365.25) / 365.25
  return 2 * Math.round((19.5 - 3 * Math.cos(2 * Math.PI * yearShare) + 0.5 * random.normal()) / 2)
}

/**
 * Two years of visits at most: film creeps, so the tension found falls from one visit to the next; now and then the maker
 * turns the rods, and the visit right after shows the wanted tension again. Newest last, within the last weeks.
 */
export function visitsOf({ now, wantedNPerM, visits, yearlyLoss }: CalendarOptions, random: SeededRandom): Visit[] {
  const gapDays = 720 / visits
  const found: { day: number, share: number, retuned: boolean }[] = []
  let day = 0
  let share = random.between(0.9, 1.04)
  for (let i = 0; i < visits; i++) {
    const retuned = !found.at(-1)?.retuned && Math.abs(share - 1) > 0.035
    found.push({ day, share, retuned })
    const step = retuned ? random.between(0.03, 0.12) : gapDays * random.between(0.6, 1.2)
    share = retuned ? 1 + 0.006 * random.normal() : share - yearlyLoss * step / 365 + 0.002 * random.normal()
    day += step
  }
  const lastDaysAgo = random.between(2, 45)
  return found.map(({ day: at, share: of, retuned }) => {
    const date = new Date(now.getTime() - (lastDaysAgo + found.at(-1)!.day - at) * DAY_MS)
    return { at: inWorkingHours(date), tensionNPerM: wantedNPerM * of, temperatureC: roomTemperatureC(date, random), retuned }
  })
}

/** Benches work from eight to six. Order within a day is kept. */
function inWorkingHours(date: Date): Date {
  const dayStart = Math.floor(date.getTime() / DAY_MS) * DAY_MS
  return new Date(dayStart + (8 + 10 * (date.getTime() - dayStart) / DAY_MS) * 3600_000)
}
