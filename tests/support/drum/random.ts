/** Seeded pseudo-random numbers (mulberry32) and normal deviates, so that every simulated recording can be made again. */

export interface Random { uniform(low?: number, high?: number): number, normal(): number, pick<T>(items: readonly T[]): T }

export function seededRandom(seed: number): Random {
  let state = (seed ^ 0x9E3779B9) >>> 0
  const next = (): number => {
    state = (state + 0x6D2B79F5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
  let spare: number | undefined
  return {
    uniform: (low = 0, high = 1) => low + (high - low) * next(),
    normal: () => {
      if (spare !== undefined) {
        const value = spare
        spare = undefined
        return value
      }
      const r = Math.sqrt(-2 * Math.log(1 - next()))
      const angle = 2 * Math.PI * next()
      spare = r * Math.sin(angle)
      return r * Math.cos(angle)
    },
    pick: items => items[Math.min(items.length - 1, Math.floor(next() * items.length))]!,
  }
}
