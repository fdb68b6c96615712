/**
 * The order in which to turn rods so that tension never runs round the rim: across the head each time, then to the gap
 * that is widest.
 *
 * Even counts go in opposite pairs; an odd count has no opposite rod, so it steps (n - 1)/2 rods, a star that visits each
 * rod once because (n - 1)/2 and n share no divisor.
 * @param rodCount  n, >= 1
 * @returns rod numbers 1 to n, each once
 */
export function crossOrder(rodCount: number): number[] {
  if (rodCount % 2 === 1) return Array.from({ length: rodCount }, (_, i) => i * Math.max(1, (rodCount - 1) / 2) % rodCount + 1)
  const half = rodCount / 2
  return spreadOrder(half).flatMap(pair => [pair + 1, pair + half + 1])
}

/** Places 0 to count - 1 of a circle, each next one as far as can be from all before, then from the last. */
function spreadOrder(count: number): number[] {
  const order = [0]
  const left = new Set(Array.from({ length: count - 1 }, (_, i) => i + 1))
  const apart = (a: number, b: number) => Math.min(Math.abs(a - b), count - Math.abs(a - b))
  while (left.size) {
    const last = order.at(-1)!
    const worth = (place: number) => count * Math.min(...order.map(taken => apart(place, taken))) + apart(place, last)
    const next = [...left].reduce((best, place) => worth(place) > worth(best) ? place : best)
    order.push(next)
    left.delete(next)
  }
  return order
}
