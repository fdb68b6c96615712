/** Gauss–Legendre quadrature for the test drum (nodes by Newton on P_n; Abramowitz & Stegun 25.4.29). */

export interface Rule { x: Float64Array, w: Float64Array }

/** Rule of `n` nodes on (-1, 1). */
export function gaussLegendre(n: number): Rule {
  const x = new Float64Array(n)
  const w = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    let z = Math.cos(Math.PI * (i + 0.75) / (n + 0.5))
    let slope = 1
    for (let pass = 0; pass < 30; pass++) {
      let p = 1
      let before = 0
      for (let j = 1; j <= n; j++) [p, before] = [((2 * j - 1) * z * p - (j - 1) * before) / j, p]
      slope = n * (z * p - before) / (z * z - 1)
      const step = p / slope
      z -= step
      if (Math.abs(step) < 1e-15) break
    }
    x[i] = z
    w[i] = 2 / ((1 - z * z) * slope * slope)
  }
  return { x, w }
}

/** The same small rule laid over every panel between consecutive `edges`. */
export function panels(edges: number[], perPanel: number): Rule {
  const rule = gaussLegendre(perPanel)
  const count = (edges.length - 1) * perPanel
  const x = new Float64Array(count)
  const w = new Float64Array(count)
  let at = 0
  for (let p = 0; p + 1 < edges.length; p++) {
    const half = (edges[p + 1]! - edges[p]!) / 2
    const mid = (edges[p + 1]! + edges[p]!) / 2
    for (let i = 0; i < perPanel; i++, at++) {
      x[at] = mid + half * rule.x[i]!
      w[at] = half * rule.w[i]!
    }
  }
  return { x, w }
}

/** Evenly spaced panel edges. */
export function evenEdges(from: number, to: number, count: number): number[] {
  return Array.from({ length: count + 1 }, (_, i) => from + (to - from) * i / count)
}
