import { quantile } from 'd3-array'
import { besselJUpTo, besselZero } from '#shared/acoustics'
import type { ModeView } from './readingParts'

/** Side of the look-up of the membrane's motion; 160 columns keep a nodal line thinner than a grain at 320 px. */
const GRID = 160
/** Steps of the radial shapes' tables. */
const STEPS = 256

export interface Sand {
  /** Grain positions in units of the radius, x to the right, y up. */
  x: Float64Array
  y: Float64Array
  random: () => number
}

/** mulberry32, a small seeded generator, so that the same reading always settles to the same picture. */
export function seededRandom(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6D2B79F5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

/** Grains spread evenly over the head. */
export function strewSand(count: number, seed: number): Sand {
  const random = seededRandom(seed)
  const x = new Float64Array(count)
  const y = new Float64Array(count)
  for (let grain = 0; grain < count; grain++) {
    const radius = Math.sqrt(random())
    const angle = 2 * Math.PI * random()
    x[grain] = radius * Math.cos(angle)
    y[grain] = radius * Math.sin(angle)
  }
  return { x, y, random }
}

/**
 * How far each place of the head moves, on a grid, 1 where nine tenths of the head move less: the matched modes frozen at
 * the moment of the tap, |sum of g J_m(alpha r) cos m(theta - theta0)|, each in phase under the beater. g weighs by
 * acceleration, which is what lifts sand, and halves the decibels between modes so that weak ones draw their lines too.
 * @param strikeAngle  theta0, angle of the strike, rad, anticlockwise from the right
 * @param strikeRatio  place of the strike as a share of the radius
 */
export function headMotion(modes: readonly Pick<ModeView, 'm' | 'n' | 'levelDb' | 'measuredHz'>[], strikeAngle: number, strikeRatio: number): Float32Array {
  const shapes = modes.map((mode) => {
    const alpha = besselZero(mode.m, mode.n)
    const radial = Float64Array.from({ length: STEPS + 1 }, (_, step) => besselJUpTo(mode.m, alpha * step / STEPS)[mode.m]!)
    const inPhase = Math.sign(radial[Math.round(strikeRatio * STEPS)]!) || 1
    return { m: mode.m, radial, gain: inPhase * 10 ** (mode.levelDb / 40) * (mode.measuredHz / modes[0]!.measuredHz) ** 2 }
  })
  const motion = new Float32Array(GRID * GRID)
  const inside: number[] = []
  for (let cell = 0; cell < GRID * GRID; cell++) {
    const x = (cell % GRID + 0.5) / GRID * 2 - 1
    const y = 1 - (Math.floor(cell / GRID) + 0.5) / GRID * 2
    const radius = Math.hypot(x, y)
    if (radius > 1) continue
    const angle = Math.atan2(y, x) - strikeAngle
    let sum = 0
    for (const { m, radial, gain } of shapes) sum += gain * radial[Math.round(radius * STEPS)]! * Math.cos(m * angle)
    motion[cell] = Math.abs(sum)
    inside.push(motion[cell]!)
  }
  const most = quantile(inside, 0.9) || 1
  return motion.map(value => Math.min(1, value / most))
}

/**
 * Grains hop as far as the head moves under them, in any direction; they come to rest where it does not. One call is one
 * bounce of every grain. A grain that would leave the head stays where it is.
 */
export function bounceSand(sand: Sand, motion: Float32Array, hop: number): void {
  const { x, y, random } = sand
  for (let grain = 0; grain < x.length; grain++) {
    const column = Math.min(GRID - 1, Math.max(0, Math.floor((x[grain]! + 1) / 2 * GRID)))
    const row = Math.min(GRID - 1, Math.max(0, Math.floor((1 - y[grain]!) / 2 * GRID)))
    const reach = hop * motion[row * GRID + column]!
    const angle = 2 * Math.PI * random()
    const nextX = x[grain]! + reach * Math.cos(angle)
    const nextY = y[grain]! + reach * Math.sin(angle)
    if (nextX * nextX + nextY * nextY > 0.985) continue
    x[grain] = nextX
    y[grain] = nextY
  }
}

/** A whole number from a reading's id, as the seed of its picture (FNV-1a). */
export function seedOf(id: string): number {
  let hash = 0x811C9DC5
  for (const character of id) hash = Math.imul(hash ^ character.codePointAt(0)!, 0x01000193)
  return hash >>> 0
}

/** Nodal lines of one mode in units of the radius: circles by radius, diameters by angle. */
export function nodalLines(m: number, n: number, strikeAngle: number): { circles: number[], diameters: number[] } {
  const alpha = besselZero(m, n)
  return {
    circles: Array.from({ length: n - 1 }, (_, index) => besselZero(m, index + 1) / alpha),
    diameters: Array.from({ length: m }, (_, index) => strikeAngle + Math.PI * (index + 0.5) / m),
  }
}

/** Angle of a rod seen from above, rad, anticlockwise from the right: rod 1 on top, counted clockwise. */
export function rodAngle(rod: number, rodCount: number): number {
  return Math.PI / 2 - 2 * Math.PI * (rod - 1) / rodCount
}
