import type { RodTurns, TurnSheetView } from '#shared/schemas/turnSheet'
import { toSixteenths } from '~/utils/turns'

interface Progress {
  /** Step in the cross order, from 0; the number of rods when all are through. */
  at: number
  /** Sixteenths really turned, by rod. */
  turned: Record<number, number>
  done: number[]
}

/** How far the sheet has been followed. Kept in this browser, so that a reload or a flat battery loses nothing. */
export function useTurnProgress(sheet: TurnSheetView) {
  const progress = useLocalStorage<Progress>(`rimwright-turn-sheet-${sheet.id}`, { at: 0, turned: {}, done: [] }, { initOnMounted: true })
  const advised = new Map(sheet.rods.map(rod => [rod.rod, toSixteenths(rod.turns)]))
  const order = sheet.order

  const at = computed(() => Math.min(progress.value.at, order.length))
  const current = computed(() => order[at.value] ?? null)
  const allDone = computed(() => order.every(rod => progress.value.done.includes(rod)))
  const isDone = (rod: number) => progress.value.done.includes(rod)
  const adviceOf = (rod: number) => advised.get(rod) ?? 0
  const turnedOf = (rod: number) => progress.value.turned[rod] ?? adviceOf(rod)

  function setTurned(rod: number, parts: number) {
    progress.value.turned[rod] = parts
  }
  function setDone(rod: number, done: boolean) {
    progress.value.done = done ? [...new Set([...progress.value.done, rod])] : progress.value.done.filter(one => one !== rod)
  }
  /** Marks the current rod and goes to the next one that is not done; past the last, the sheet is through. */
  function next() {
    if (current.value === null) return
    setDone(current.value, true)
    const ahead = order.findIndex((rod, index) => index > at.value && !isDone(rod))
    const left = ahead >= 0 ? ahead : order.findIndex(rod => !isDone(rod))
    progress.value.at = left >= 0 ? left : order.length
  }
  function goTo(index: number) {
    progress.value.at = Math.max(0, Math.min(order.length, index))
  }
  /** What was really turned, as the route takes it; a rod not marked done was not turned. */
  const applied = computed<RodTurns[]>(() => order.map(rod => ({ rod, turns: isDone(rod) ? turnedOf(rod) / 16 : 0 })))
  const forget = () => {
    progress.value = { at: 0, turned: {}, done: [] }
  }
  return { at, current, allDone, isDone, adviceOf, turnedOf, setTurned, setDone, next, goTo, applied, forget }
}
export type TurnProgress = ReturnType<typeof useTurnProgress>
