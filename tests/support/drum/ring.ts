/** From the drum's modes, a strike and a microphone to the lines that sound, and from lines to samples. */
import { jm } from './bessel'
import type { Complex } from './complex'
import { add, c, div, exp, mul, scale } from './complex'
import { BASIS, M_MAX } from './airTable'
import { basisZeros } from './airHalfSpace'
import { pressureWeights } from './microphone'
import type { DrumModel } from './modes'
import type { SimMicrophone, SimStrike } from './types'
import type { MixedMode } from './unevenness'
import { gatherShape } from './unevenness'

/**
 * One decaying line: Re{amplitude exp(-(gamma + i omega) t) G(t)}, G the transform of the push so far.
 * `freeHz` is where it would stand without a finger on the head.
 */
export interface Line { mode: MixedMode, omega: number, gamma: number, amplitude: Complex, loudness: number, stretch: number, tensionShare: number, otherShare: number, freeHz: number }

const angularPart = (m: number, side: 0 | 1, theta: number): number =>
  (side === 0 ? Math.cos(m * theta) : Math.sin(m * theta)) / Math.sqrt(m === 0 ? 2 * Math.PI : Math.PI)

/** phi_n(r) of unit norm on a unit disc, averaged over a round patch of radius `patch`. */
function shapeAt(m: number, n: number, r: number, patch: number): number {
  const alpha = basisZeros(m)[n]!
  const ka = alpha * patch
  const average = ka < 1e-6 ? 1 : 2 * jm(1, ka) / ka
  return Math.SQRT2 / jm(m + 1, alpha) * jm(m, alpha * r) * average
}

type Weights = Map<number, Complex[]>

/**
 * The microphone's weights for a mode. Mixed modes of an uneven head need all orders at once: those are kept on a grid
 * of frequencies 5 % apart, and brought to the mode's own by the square of its frequency, as pressure goes.
 */
function listenTo(model: DrumModel, microphone: SimMicrophone): (mode: MixedMode, groups: { m: number }[]) => { near: Weights, far?: Weights, strength: number } {
  const { drum, films } = model
  const kept = new Map<number, { near: Weights, far?: Weights }>()
  const all = Array.from({ length: M_MAX + 1 }, (_, m) => m)
  const make = (orders: number[], omega: number): { near: Weights, far?: Weights } => {
    const listener = { radiusM: microphone.radiusRatio * drum.radiusM, heightM: microphone.heightM, k0: omega / model.sound, density: model.density, omega }
    // The other head is heard round the shell, from further off.
    const behind = { ...listener, heightM: listener.heightM + drum.depthM + drum.radiusM }
    return {
      near: pressureWeights(orders, films[0]!.effectiveRadiusM, listener, drum.construction === 'frame'),
      far: films[1] && pressureWeights(orders, films[1].effectiveRadiusM, behind, false),
    }
  }
  return (mode, groups) => {
    if (groups.length === 1) return { ...make([groups[0]!.m], mode.omega), strength: 1 }
    const cell = Math.round(Math.log(mode.omega) / 0.05)
    const found = kept.get(cell) ?? make(all, Math.exp(cell * 0.05))
    kept.set(cell, found)
    return { ...found, strength: (mode.omega / Math.exp(cell * 0.05)) ** 2 }
  }
}

/** int_0^t sin(pi s/tau) exp(mu s) ds, mu = gamma + i omega. */
function push(t: number, tau: number, mu: Complex): Complex {
  const a = Math.PI / tau
  const e = exp(scale(mu, t))
  const inner = add(scale(mu, Math.sin(a * t)), c(-a * Math.cos(a * t)))
  const numerator = add(mul(e, inner), c(a))
  return div(numerator, add(c(a * a), mul(mu, mu)))
}

export function soundingLines(model: DrumModel, modes: MixedMode[], strike: SimStrike, microphone: SimMicrophone): Line[] {
  const { drum } = model
  const tau = strike.contactS ?? 0.003
  const patch = (strike.patchM ?? 0.008) / drum.radiusM
  const centre = shapeAt(0, 0, 0, 0) ** 2
  const hearing = listenTo(model, microphone)
  return modes.map((mode) => {
    const even = mode.leading.root
    let force = c(0)
    let pressure = c(0)
    let atCentre = 0
    const groups = gatherShape(mode)
    const { near, far, strength } = hearing(mode, groups)
    for (const { m, side, shape } of groups) {
      const struck = angularPart(m, side, strike.angleRad ?? 0)
      const heard = angularPart(m, side, microphone.angleRad ?? 0)
      for (let n = 0; n < BASIS; n++) {
        force = add(force, scale(shape[n]!, struck * shapeAt(m, n, strike.radiusRatio, patch)))
        pressure = add(pressure, scale(mul(shape[n]!, near.get(m)![n]!), heard))
        if (far) pressure = add(pressure, scale(mul(shape[BASIS + n]!, far.get(m)![n]!), -heard))
        if (m === 0) atCentre += shape[n]!.re * shapeAt(0, n, 0, 0)
      }
    }
    const ownLoss = (drum.lossPerS ?? 2) + (drum.lossPerHz ?? 0.022) * mode.omega / (2 * Math.PI)
    const finger = strike.centreDamped ? 60 * atCentre ** 2 / centre * (even.shape[0] ? model.films[0]!.head.arealDensityKgM2 : 0) : 0
    const gamma = mode.gamma + ownLoss + finger
    // Damping moves the line: omega_d^2 = omega_0^2 - gamma^2, with omega_0^2 = omega^2 + gamma_air^2.
    const omega = Math.sqrt(mode.omega ** 2 + mode.gamma ** 2 - gamma ** 2)
    const drive = push(tau, tau, c(gamma, omega))
    const driven = mul(force, scale(drive, strike.force ?? 1))
    const amplitude = mul(mul(c(0, strength / mode.omega), scale(force, strike.force ?? 1)), pressure)
    const heard = mul(amplitude, drive)
    return {
      mode, omega, gamma, amplitude,
      freeHz: Math.sqrt(mode.omega ** 2 + mode.gamma ** 2 - (mode.gamma + ownLoss) ** 2) / (2 * Math.PI),
      loudness: Math.hypot(heard.re, heard.im),
      stretch: (driven.re ** 2 + driven.im ** 2) * even.tensionShare[0],
      tensionShare: even.tensionShare[0],
      otherShare: even.tensionShare[1],
    }
  })
}

/** Samples of all lines from the moment of contact. The tension rises by `glide` times the stretch left at each time. */
export function renderLines(lines: Line[], strike: SimStrike, count: number, sampleRateHz: number): Float64Array {
  const out = new Float64Array(count)
  const tau = strike.contactS ?? 0.003
  const glide = strike.glide ?? 0
  const rise = tensionRise(lines, glide, count, sampleRateHz)
  const loudest = Math.max(...lines.map(line => line.loudness))
  for (const line of lines) {
    if (line.loudness < 1e-6 * loudest) continue
    const mu = c(line.gamma, line.omega)
    const contact = Math.min(count, Math.ceil(tau * sampleRateHz))
    for (let i = 0; i < contact; i++) {
      const t = i / sampleRateHz
      const y = mul(mul(line.amplitude, push(t, tau, mu)), exp(scale(mu, -t)))
      out[i]! += y.re
    }
    const from = contact / sampleRateHz
    let y = mul(mul(line.amplitude, push(tau, tau, mu)), exp(scale(mu, -from)))
    let step = exp(scale(mu, -1 / sampleRateHz))
    for (let i = contact; i < count; i++) {
      if (glide > 0 && i % BLOCK === 0) {
        step = exp(scale(c(line.gamma, line.omega * Math.sqrt(1 + line.tensionShare * rise[i / BLOCK]!)), -1 / sampleRateHz))
      }
      out[i]! += y.re
      y = mul(y, step)
      if (i % 4096 === 0 && Math.hypot(y.re, y.im) < 1e-9 * loudest) break
    }
  }
  return out
}

const BLOCK = 16

/** Share by which the tension stands above rest, every BLOCK samples: mean stretch, sum of mode energies. */
function tensionRise(lines: Line[], glide: number, count: number, sampleRateHz: number): Float64Array {
  const rise = new Float64Array(Math.ceil(count / BLOCK) + 1)
  if (glide === 0) return rise
  const total = lines.reduce((sum, line) => sum + line.stretch, 0)
  for (const line of lines) {
    for (let i = 0; i < rise.length; i++) rise[i]! += glide * line.stretch / total * Math.exp(-2 * line.gamma * i * BLOCK / sampleRateHz)
  }
  return rise
}
