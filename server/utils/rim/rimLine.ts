import type { RimBasis } from '../../../shared/acoustics'
import { PER_TAP, TAP, type MicrophoneKind, type ParameterMap } from './parameters'
import type { RimModes } from './rimModes'

/** Shapes under every strike, and their slopes by r/R and by angle: at i * size + q. */
export interface StrikeShapes { value: Float64Array, byRadius: Float64Array, byAngle: Float64Array }

/** Evaluates the basis where x says the strikes were. */
export function strikeShapes(basis: RimBasis, map: ParameterMap, rodAngles: Float64Array, x: Float64Array): StrikeShapes {
  const length = map.tapCount * basis.size
  const out = { value: new Float64Array(length), byRadius: new Float64Array(length), byAngle: new Float64Array(length) }
  const at = { value: 0, byRadius: 0, byAngle: 0 }
  for (let i = 0; i < map.tapCount; i++) {
    const tap = map.taps + PER_TAP * i
    for (let q = 0; q < basis.size; q++) {
      basis.shapeAt(q, Math.min(0.995, x[map.radius]! + x[tap + TAP.radius]!), rodAngles[i]! + x[tap + TAP.angle]!, at)
      out.value[i * basis.size + q] = at.value
      out.byRadius[i * basis.size + q] = at.byRadius
      out.byAngle[i * basis.size + q] = at.byAngle
    }
  }
  return out
}

/** One sounding mode of the uneven head. */
export interface RimLine {
  mode: number
  omega: number
  gamma: number
  /** Its share in each family, where it is worth a slope. */
  families: { family: number, share: number }[]
  /** Its part of each shape. */
  shapes: { shape: number, mix: number }[]
}

/** Below this a shape's part is counted, but not its slope. */
const LEAST_MIX = 0.01

/** The lines of all modes, each with what it is made of. */
export function soundingLines(basis: RimBasis, map: ParameterMap, x: Float64Array, modes: RimModes): RimLine[] {
  const shares = new Float64Array(basis.families.length)
  return Array.from({ length: basis.size }, (_, p) => {
    shares.fill(0)
    const shapes: RimLine['shapes'] = []
    let gamma = 0
    let factor = 0
    for (let q = 0; q < basis.size; q++) {
      const family = basis.familyOf[q]!
      const mix = modes.mix[p * basis.size + q]!
      shares[family]! += mix * mix
      gamma += mix * mix * Math.exp(x[map.decays + family]!)
      factor += mix * mix * x[map.frequencies + family]!
      shapes.push({ shape: q, mix })
    }
    const families = [...shares].map((share, family) => ({ family, share })).filter(f => f.share > LEAST_MIX ** 2)
    return { mode: p, omega: modes.omega[p]! * Math.exp(factor), gamma, families, shapes }
  })
}

/** Spectrum of a half-sine push about its middle, unit at zero frequency up to a constant, and its slope by ln of its length. Source: half-sine pulse, cos(u pi / 2) / (1 - u^2). */
function pushSpectrum(omega: number, contactS: number): { value: number, byLength: number } {
  const u = omega * contactS / Math.PI
  const at = (v: number) => (Math.abs(1 - v * v) < 1e-6 ? Math.PI / 4 : Math.cos(Math.PI * v / 2) / (1 - v * v))
  const step = 1e-4
  return { value: at(u), byLength: u * (at(u + step) - at(u - step)) / (2 * step) }
}

/** A line's amplitude in one tap, and its slopes: by unknown, each re, im. */
export interface LineAmplitude {
  re: number
  im: number
  slopes: { column: number, re: number, im: number }[]
  /** Slope by the mode's own omega and by its gamma, G apart. */
  byOmega: { re: number, im: number }
  byGamma: { re: number, im: number }
}

export interface AmplitudeContext {
  basis: RimBasis
  map: ParameterMap
  microphone: MicrophoneKind
  rodAngles: Float64Array
  /** From the found onset to the first sample, s, by tap. */
  delaysS: Float64Array
  shapes: StrikeShapes
  modes: RimModes
}

/**
 * Amplitude of a line where a tap's ring begins: shape under the strike x what the microphone hears of the mode x the
 * push's spectrum x the decay and phase since the push. slopes are left out unless asked for.
 */
export function lineAmplitude(context: AmplitudeContext, x: Float64Array, line: RimLine, i: number, withSlopes: boolean): LineAmplitude {
  const { basis, map, microphone, rodAngles, shapes, modes } = context
  const { size } = basis
  const row = line.mode * size
  let value = 0
  let byRadius = 0
  let byAngle = 0
  for (let q = 0; q < size; q++) {
    const mix = modes.mix[row + q]!
    value += mix * shapes.value[i * size + q]!
    byRadius += mix * shapes.byRadius[i * size + q]!
    byAngle += mix * shapes.byAngle[i * size + q]!
  }
  const tap = map.taps + PER_TAP * i
  let heardRe = 0
  let heardIm = 0
  const places: { column: number, weight: number }[] = []
  for (const { shape, mix } of line.shapes) {
    const family = basis.familyOf[shape]!
    const { m } = basis.families[family]!
    let weight = mix
    if (microphone === 'following') {
      const angle = m * rodAngles[i]!
      weight *= basis.sideOf[shape] === 0 ? Math.cos(angle) : Math.sin(angle)
    }
    const column = map.weights + 2 * (microphone === 'fixed' ? shape : family)
    heardRe += weight * x[column]!
    heardIm += weight * x[column + 1]!
    if (Math.abs(mix) > LEAST_MIX) places.push({ column, weight })
  }
  const contactS = Math.exp(x[map.contact]! + x[tap + TAP.contact]!)
  const push = pushSpectrum(line.omega, contactS)
  // The push is measured from its middle; its start is what the onset is.
  const since = context.delaysS[i]! - x[tap + TAP.time]!
  // A push gives 1 / omega of motion; near the head the pressure goes with the acceleration, omega^2 of it.
  const size0 = Math.exp(x[tap + TAP.force]! - line.gamma * since) * line.omega / 1000
  const phase = line.omega * since
  const kr = size0 * Math.cos(phase)
  const ki = size0 * Math.sin(phase)
  const driveRe = kr * push.value
  const driveIm = ki * push.value
  const baseRe = heardRe * driveRe - heardIm * driveIm
  const baseIm = heardRe * driveIm + heardIm * driveRe
  const re = value * baseRe
  const im = value * baseIm
  const none = { re: 0, im: 0 }
  if (!withSlopes) return { re, im, slopes: [], byOmega: none, byGamma: none }
  const slopes: LineAmplitude['slopes'] = places.flatMap(({ column, weight }) => {
    const r = value * weight * driveRe
    const s = value * weight * driveIm
    return [{ column, re: r, im: s }, { column: column + 1, re: -s, im: r }]
  })
  const length = push.value === 0 ? 0 : push.byLength / push.value
  slopes.push(
    { column: tap + TAP.force, re, im },
    // d/dt exp((i omega - gamma)(since)) with since falling as t grows.
    { column: tap + TAP.time, re: line.gamma * re + line.omega * im, im: line.gamma * im - line.omega * re },
    { column: tap + TAP.contact, re: length * re, im: length * im },
    { column: map.contact, re: length * re, im: length * im },
    { column: tap + TAP.angle, re: byAngle * baseRe, im: byAngle * baseIm },
    { column: tap + TAP.radius, re: byRadius * baseRe, im: byRadius * baseIm },
    { column: map.radius, re: byRadius * baseRe, im: byRadius * baseIm },
  )
  const byLn = (length + 1) / line.omega
  return {
    re, im, slopes,
    byOmega: { re: byLn * re - since * im, im: byLn * im + since * re },
    byGamma: { re: -since * re, im: -since * im },
  }
}
