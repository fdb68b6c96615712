/** Repeatable random numbers for the demo (mulberry32, public domain): the same workshop on every machine. */
export function seededRandom(seed: number) {
  let state = seed >>> 0
  const uniform = (): number => {
    state = (state + 0x6d2b79f5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
  const between = (low: number, high: number): number => low + (high - low) * uniform()
  const normal = (): number => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform())
  const pick = <T>(list: readonly T[]): T => list[Math.floor(uniform() * list.length)]!
  return { uniform, between, normal, pick }
}

export type SeededRandom = ReturnType<typeof seededRandom>
