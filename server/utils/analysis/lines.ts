import { BLOCK_HZ, findCandidates, type SearchResult } from './candidates'
import { bandAround, dropWorst, sweep, withErrors, type FittedTone, type RingSpectrum } from './clusters'
import { subtractFromRing } from './decay'
import { rippleOf, roomShare, withRoom } from './roomError'
import { spectrumOf } from './spectrum'
import { splitGroups } from './split'
import { fitTones } from './toneFit'

/** One partial found in the ring of a tap: a decaying cosine, amplitude, level and phase where listening began. */
export interface SpectralLine {
  /** Damped frequency, Hz. */
  frequencyHz: number
  /** Standard error of frequencyHz, Hz: noise and the room's tail as found in this recording. */
  standardErrorHz: number
  /** Amplitude where listening began (usually 8 ms after the onset), in units of full scale. */
  amplitude: number
  /** Amplitude against the strongest decaying line, dB, <= 0 for decaying lines. */
  levelDb: number
  /** Decay rate: the amplitude falls as exp(-gamma t), 1/s, >= 0. T60 = 6.908 / gamma. */
  gammaPerS: number
  /** Phase of the cosine where listening began, rad. */
  phaseRad: number
  /** Does not decay: mains hum, a fan. Never a drum's line. */
  steady: boolean
}

/** What the search for lines gives: the lines, and what it could have heard. */
export interface LineFindings {
  /** In order of frequency; steady ones included and marked. */
  lines: SpectralLine[]
  /** The band that was searched, Hz. */
  fromHz: number
  toHz: number
  /** Level that a line had to reach to be found, dB against the strongest line, on an even grid from fromHz to toHz. */
  detection: { stepHz: number, levelDb: number[] }
  /** Share of the ring's energy above the noise that the decaying lines explain, 0 to 1. */
  explainedShare: number
  /** How far the pitch stood above its rest where listening began, as a share of it, and its standard error; absent where it did not glide. */
  glide?: { share: number, standardError: number }
}

/** The part of one tap that rings by itself: nothing of the strike's contact, nothing of the next tap. */
export interface Ring {
  samples: Float64Array
  sampleRateHz: number
  /** Highest frequency that is free of aliases, Hz. */
  passHz: number
  /** Mean square of the noise in the same band, from the quiet before the tap or the tail; 0 where unknown. */
  noisePower: number
  /** How long after the contact it begins, s; 0 where unknown. */
  sinceS?: number
}

const FROM_HZ = 20
const HIGHEST_HZ = 4000
const ROUNDS = 4
const MOST_A_ROUND = 24
const MOST_LINES = 48
const MOST_PASSES = 4
/** A tone that moves by less than this share of its standard error has settled. */
const STILL = 0.1
/** Flanks below this share of a group's own peak are left out in the last fits; before, those below a thousandth. */
const FARTHEST_IN_THE_END = 1e-5
/** A drum's line that took longer than this to fall by 60 dB would need a head without air, s. */
const STEADY_T60_S = 20

/** Time in which a line with decay rate gammaPerS falls by 60 dB, s: ln(1000) / gamma. */
export function t60FromGamma(gammaPerS: number): number {
  return Math.log(1000) / gammaPerS
}

/** A ring with its spectrum and the tones found in it so far. */
export interface RingLook {
  ring: Ring
  grid: RingSpectrum
  tones: FittedTone[]
  found: SearchResult
}

/** True for a tone that does not decay within seconds: hum, a fan. gammaPerS is its decay rate, 1/s. */
export const isSteady = (tone: { gammaPerS: number }) => tone.gammaPerS < Math.log(1000) / STEADY_T60_S

/** Finds the lines of a ring; see linesOf. */
export function findLines(ring: Ring): LineFindings {
  return linesOf(lookAt(ring)).findings
}

/** The first look: the peaks of a windowed transform, one decaying tone each. A glide shows in what they leave. */
export function lookAt(ring: Ring): RingLook {
  const spectrum = spectrumOf(ring.samples, ring.sampleRateHz)
  const grid: RingSpectrum = { sampleRateHz: ring.sampleRateHz, length: ring.samples.length, size: spectrum.size, spectrum }
  const found = findCandidates(ring.samples, searchOf(ring, 0), [], MOST_A_ROUND)
  return { ring, grid, tones: settle(grid, startTones(grid, found, []), limitsOf(ring)), found }
}

/**
 * Finds all lines from a first look on: lines whose band holds more than one tone can explain are split where that clearly
 * pays, all are taken off, and what is left is searched again until nothing stands out.
 * @returns the findings, and the tones behind them
 */
export function linesOf(look: RingLook): { findings: LineFindings, tones: FittedTone[] } {
  const { ring, grid } = look
  const limits = limitsOf(ring)
  const share = () => roomShare(grid, tones, limits.noisePerBin, limits.sinceS)
  const whole = new Map<string, number>()
  let { tones, found } = look
  for (let round = 0; round < ROUNDS && found.candidates.length > 0 && tones.length < MOST_LINES; round++) {
    if (round > 0) tones = settle(grid, startTones(grid, found, tones), limits)
    if (round === 0) tones = splitGroups(grid, tones, limits.noisePerBin, whole)
    found = findCandidates(ring.samples, searchOf(ring, rippleOf(share())), tones, Math.min(MOST_A_ROUND, MOST_LINES - tones.length))
  }
  tones = settle(grid, splitGroups(grid, tones, limits.noisePerBin, whole), limits, 'final')
  const room = { share: share(), ...limits }
  tones = tones.map(t => withRoom(grid, t, tones, room))
  return { findings: describe(ring, tones, found.threshold), tones }
}

const highestOf = (ring: Ring) => Math.min(HIGHEST_HZ, ring.passHz)
const searchOf = (ring: Ring, ripple: number) => ({ sampleRateHz: ring.sampleRateHz, fromHz: FROM_HZ, toHz: highestOf(ring), ripple })
const limitsOf = (ring: Ring) => ({ toHz: highestOf(ring), noisePerBin: ring.noisePower * ring.samples.length, sinceS: ring.sinceS ?? 0 })

function startTones(grid: RingSpectrum, found: SearchResult, tones: FittedTone[]): FittedTone[] {
  const all = [...tones]
  for (const candidate of found.candidates) all.push(startTone(grid, candidate, all))
  return all
}

type Limits = ReturnType<typeof limitsOf>

/** Fits and drops in turn until what is left holds up; the final time until nothing moves, and with the far flanks of all. */
function settle(grid: RingSpectrum, tones: FittedTone[], limits: Limits, final?: 'final'): FittedTone[] {
  const fit = (all: FittedTone[]) => final ? sweep(grid, all, 8, FARTHEST_IN_THE_END) : sweep(grid, all, 3)
  let fitted = fit(fit(tones))
  for (let pass = 0; pass < MOST_PASSES; pass++) {
    const kept = dropWorst(fitted, limits.toHz, rippleOf(roomShare(grid, fitted, limits.noisePerBin, limits.sinceS)))
    if (kept.length === fitted.length) break
    fitted = fit(kept)
  }
  for (let pass = 0; final && pass < MOST_PASSES; pass++) {
    const before = fitted
    fitted = fit(before)
    if (fitted.every((tone, i) => Math.abs(tone.frequencyHz - before[i]!.frequencyHz) < STILL * tone.standardErrorHz)) break
  }
  return fitted
}

function startTone(grid: RingSpectrum, start: { frequencyHz: number, gammaPerS: number }, others: FittedTone[]): FittedTone {
  const seed: FittedTone = { frequencyHz: start.frequencyHz, gammaPerS: start.gammaPerS, re: 0, im: 0, standardErrorHz: 0, amplitudeError: 0, errorPerUnitHz: 0, energyOverNoise: 0 }
  const band = bandAround(grid, [seed], [...others, seed])
  return withErrors(grid, band, fitTones(grid, band, [seed], 3))[0]!
}

function describe(ring: Ring, tones: FittedTone[], threshold: Float64Array): LineFindings {
  const amplitude = (t: FittedTone) => 2 * Math.hypot(t.re, t.im)
  const decaying = tones.filter(t => !isSteady(t))
  const strongest = Math.max(1e-12, ...decaying.map(amplitude))
  const lines = tones.map((t): SpectralLine => ({
    frequencyHz: t.frequencyHz,
    standardErrorHz: t.standardErrorHz,
    amplitude: amplitude(t),
    levelDb: 20 * Math.log10(amplitude(t) / strongest),
    gammaPerS: t.gammaPerS,
    phaseRad: Math.atan2(t.im, t.re),
    steady: isSteady(t),
  }))
  return { lines, fromHz: FROM_HZ, toHz: highestOf(ring), detection: detectionLevels(ring, decaying, threshold, strongest), explainedShare: explainedShare(ring, tones) }
}

/** Windowed power turned into the amplitude of a tone with the middle decay rate of those found. */
function detectionLevels(ring: Ring, decaying: FittedTone[], threshold: Float64Array, strongest: number) {
  const rates = decaying.map(t => t.gammaPerS).sort((a, b) => a - b)
  const gamma = rates[rates.length >> 1] ?? 10
  // Sum over the search window of exp(-gamma t), its slow fall included as 4 / s.
  const gain = ring.sampleRateHz / (gamma + 4)
  return { stepHz: BLOCK_HZ, levelDb: [...threshold].map(p => Math.round(100 * Math.log10(4 * p / gain ** 2 / strongest ** 2)) / 10) }
}

/** Share of the ring's energy above the noise, and without what does not decay, that the decaying tones explain, 0 to 1. */
export function explainedShare(ring: Ring, tones: FittedTone[]): number {
  const rest = ring.samples.slice()
  const decaying = tones.filter(t => !isSteady(t))
  subtractFromRing(rest, ring.sampleRateHz, tones.filter(isSteady))
  const noise = ring.noisePower * ring.samples.length
  const before = energy(rest)
  subtractFromRing(rest, ring.sampleRateHz, decaying)
  const signal = before - noise
  return signal > 0 ? Math.max(0, Math.min(1, 1 - Math.max(0, energy(rest) - noise) / signal)) : 0
}

function energy(samples: Float64Array): number {
  let sum = 0
  for (const x of samples) sum += x * x
  return sum
}
