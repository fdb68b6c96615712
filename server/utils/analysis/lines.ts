import { BLOCK_HZ, findCandidates } from './candidates'
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
}

/** The part of one tap that rings by itself: nothing of the strike's contact, nothing of the next tap. */
export interface Ring {
  samples: Float64Array
  sampleRateHz: number
  /** Highest frequency that is free of aliases, Hz. */
  passHz: number
  /** Mean square of the noise in the same band, from the quiet before the tap or the tail; 0 where unknown. */
  noisePower: number
}

const FROM_HZ = 20
const HIGHEST_HZ = 4000
const ROUNDS = 4
const MOST_A_ROUND = 24
const MOST_LINES = 48
const MOST_PASSES = 4
/** A drum's line that took longer than this to fall by 60 dB would need a head without air, s. */
const STEADY_T60_S = 20

/** Time in which a line with decay rate gammaPerS falls by 60 dB, s: ln(1000) / gamma. */
export function t60FromGamma(gammaPerS: number): number {
  return Math.log(1000) / gammaPerS
}

/**
 * Finds the lines of a ring: peaks of a windowed transform, fitted as decaying tones, taken off, and searched again until
 * nothing stands out; then lines whose band holds more than one tone can explain are split where that clearly pays.
 */
export function findLines(ring: Ring): LineFindings {
  const toHz = Math.min(HIGHEST_HZ, ring.passHz)
  const search = { sampleRateHz: ring.sampleRateHz, fromHz: FROM_HZ, toHz, ripple: 0 }
  const spectrum = spectrumOf(ring.samples, ring.sampleRateHz)
  const grid: RingSpectrum = { sampleRateHz: ring.sampleRateHz, length: ring.samples.length, size: spectrum.size, spectrum }
  const noisePerBin = ring.noisePower * ring.samples.length
  let tones: FittedTone[] = []
  let found = findCandidates(ring.samples, search, [], MOST_A_ROUND)
  for (let round = 0; round < ROUNDS && found.candidates.length > 0 && tones.length < MOST_LINES; round++) {
    for (const candidate of found.candidates) tones.push(startTone(grid, candidate, tones))
    tones = settle(grid, tones, { toHz, noisePerBin })
    if (round === 0) tones = splitGroups(grid, tones, noisePerBin)
    search.ripple = rippleOf(roomShare(grid, tones, noisePerBin))
    found = findCandidates(ring.samples, search, tones, Math.min(MOST_A_ROUND, MOST_LINES - tones.length))
  }
  tones = settle(grid, splitGroups(grid, tones, noisePerBin), { toHz, noisePerBin }, 8)
  const share = roomShare(grid, tones, noisePerBin)
  return describe(ring, tones.map(t => withRoom(t, share)), found.threshold, toHz)
}

/** Fits and drops in turn until what is left holds up. */
function settle(grid: RingSpectrum, tones: FittedTone[], limits: { toHz: number, noisePerBin: number }, iterations = 3): FittedTone[] {
  let fitted = sweep(grid, sweep(grid, tones, iterations), iterations)
  for (let pass = 0; pass < MOST_PASSES; pass++) {
    const kept = dropWorst(fitted, limits.toHz, rippleOf(roomShare(grid, fitted, limits.noisePerBin)))
    if (kept.length === fitted.length) break
    fitted = sweep(grid, kept, iterations)
  }
  return fitted
}

function startTone(grid: RingSpectrum, start: { frequencyHz: number, gammaPerS: number }, others: FittedTone[]): FittedTone {
  const seed: FittedTone = { frequencyHz: start.frequencyHz, gammaPerS: start.gammaPerS, re: 0, im: 0, standardErrorHz: 0, amplitudeError: 0 }
  const band = bandAround(grid, [seed], [...others, seed])
  return withErrors(grid, band, fitTones(grid, band, [seed], 3))[0]!
}

function describe(ring: Ring, tones: FittedTone[], threshold: Float64Array, toHz: number): LineFindings {
  const steady = (t: FittedTone) => t.gammaPerS < Math.log(1000) / STEADY_T60_S
  const amplitude = (t: FittedTone) => 2 * Math.hypot(t.re, t.im)
  const decaying = tones.filter(t => !steady(t))
  const strongest = Math.max(1e-12, ...decaying.map(amplitude))
  const lines = tones.map((t): SpectralLine => ({
    frequencyHz: t.frequencyHz,
    standardErrorHz: t.standardErrorHz,
    amplitude: amplitude(t),
    levelDb: 20 * Math.log10(amplitude(t) / strongest),
    gammaPerS: t.gammaPerS,
    phaseRad: Math.atan2(t.im, t.re),
    steady: steady(t),
  }))
  return { lines, fromHz: FROM_HZ, toHz, detection: detectionLevels(ring, decaying, threshold, strongest), explainedShare: explained(ring, tones, decaying) }
}

/** Windowed power turned into the amplitude of a tone with the middle decay rate of those found. */
function detectionLevels(ring: Ring, decaying: FittedTone[], threshold: Float64Array, strongest: number) {
  const rates = decaying.map(t => t.gammaPerS).sort((a, b) => a - b)
  const gamma = rates[rates.length >> 1] ?? 10
  // Sum over the search window of exp(-gamma t), its slow fall included as 4 / s.
  const gain = ring.sampleRateHz / (gamma + 4)
  return { stepHz: BLOCK_HZ, levelDb: [...threshold].map(p => Math.round(100 * Math.log10(4 * p / gain ** 2 / strongest ** 2)) / 10) }
}

function explained(ring: Ring, tones: FittedTone[], decaying: FittedTone[]): number {
  const rest = ring.samples.slice()
  subtractFromRing(rest, ring.sampleRateHz, tones.filter(t => !decaying.includes(t)))
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
