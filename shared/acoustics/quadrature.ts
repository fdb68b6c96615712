export interface QuadratureRule {
  /** Nodes in (0, 1). */
  nodes: Float64Array
  /** Weights; they add up to 1. */
  weights: Float64Array
}

const rules = new Map<number, QuadratureRule>()

/**
 * Gauss-Legendre rule on (0, 1): exact for polynomials up to degree 2 count - 1.
 *
 * @param count  number of nodes, whole, >= 1
 * Source: NIST DLMF section 3.5(v); nodes by Newton's method on P_count.
 */
export function gaussLegendre(count: number): QuadratureRule {
  const known = rules.get(count)
  if (known) return known
  const nodes = new Float64Array(count)
  const weights = new Float64Array(count)
  for (let i = 0; i < count; i++) {
    let x = Math.cos(Math.PI * (i + 0.75) / (count + 0.5))
    let slope = 1
    for (let round = 0; round < 30; round++) {
      let p0 = 1
      let p1 = x
      for (let k = 2; k <= count; k++) {
        const p2 = ((2 * k - 1) * x * p1 - (k - 1) * p0) / k
        p0 = p1
        p1 = p2
      }
      slope = count === 1 ? 1 : count * (x * p1 - p0) / (x * x - 1)
      const step = (count === 1 ? x : p1) / slope
      x -= step
      if (Math.abs(step) < 1e-16) break
    }
    nodes[i] = (1 - x) / 2
    weights[i] = 1 / ((1 - x * x) * slope * slope)
  }
  const rule = { nodes, weights }
  rules.set(count, rule)
  return rule
}
