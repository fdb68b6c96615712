/** A reading and the facts of its sound, as the analysis makes them, the database keeps them and the API gives them. Plain data. */

export type RefusalCode = 'silent' | 'clipped' | 'too-short' | 'low-rate' | 'no-tap' | 'not-a-drum' | 'not-wav' | 'too-large'

export interface Refusal { code: RefusalCode, message: string }

export type HeadSide = 'batter' | 'resonant'

export interface MatchedMode {
  m: number
  n: number
  measuredHz: number
  u95Hz: number
  predictedHz: number
  /** Level against the strongest line, dB, <= 0. */
  levelDb: number
  /** Time to fall by 60 dB, s. */
  t60S: number
  /** Both lines of a split pair, Hz, low one first; absent where the pair is one line. */
  splitHz?: [number, number]
  /** Which head the line belongs to, when it is not the struck one. */
  head?: 'other'
  /** Two heads, no nodal diameters: whether they move the same way or against each other. */
  branch?: 'in-phase' | 'against'
}

/** A tone that no mode explains; u95Hz is missing in readings of version 1.0.0, cause where none is likely. */
export interface UnexplainedPeak { frequencyHz: number, levelDb: number, t60S: number, u95Hz?: number, cause?: string }

export interface BudgetLine {
  /** Plain name of the contribution, e.g. 'diameter'. */
  name: string
  kind: 'A' | 'B'
  /** Standard uncertainty of the tension from this contribution alone, N/m. */
  standardNPerM: number
  /** Share of the combined variance, 0 to 1. */
  share: number
  /** Where the figure comes from. */
  source: string
  /** Counts towards repeatability on the same drum and bench. */
  repeatable: boolean
}

/** A figure with its standard uncertainty. */
export interface Measured { value: number, standard: number }

/**
 * What a reading at a known tension teaches of an instrument and its head. Later readings of the same head start from
 * it: the figures below with their standard uncertainties, and how they hang together.
 */
export interface HeadCalibration {
  /** Factor on the added mass of the air for modes without, and with, nodal diameters. */
  airScaleAxisymmetric: Measured
  airScaleOthers: Measured
  /** c of the effective radius R - c sqrt(D/T). */
  edgeFactor: Measured
  arealDensityKgM2: Measured
  radiusM: Measured
  /** Of ln air m = 0, ln air m >= 1, edge factor, ln areal density, ln radius: 25 numbers, row by row. */
  covariance: number[]
  /** The tension that it rests on, N/m. */
  tensionNPerM: Measured
}

/** What one reading of a double-headed drum says of both heads. */
export interface TwoHeads {
  struck: HeadSide
  /** Tension of the head that was not struck, as this tap shows it. */
  other: { nPerM: number, u95NPerM: number }
  /** What rests on little: a head's own tension, or how the two are coupled. Empty where all is sure. */
  unsure: Array<HeadSide | 'coupling'>
}

export interface ReadingWarning { code: string, message: string }

export interface RodTension { rod: number, nPerM: number, u95NPerM: number, deviationPercent: number }

/** The reading, in the shape that the API gives and the database keeps. */
export interface AnalysedReading {
  analysisVersion: string
  tension: { nPerM: number, u95NPerM: number, repeatabilityU95NPerM: number }
  fundamentalHz: number
  confidence: number
  doubtful: boolean
  modes: MatchedMode[]
  unexplained: UnexplainedPeak[]
  taps: { atS: number, rod: number | null }[]
  rim: null | { evennessPercent: number, rods: RodTension[] }
  budget: BudgetLine[]
  /** Double-headed drums only. */
  twoHeads?: TwoHeads
  /** How far a loud stroke raised the pitch where listening began, as a share of the pitch at rest; absent where it did not. */
  glide?: { share: number, standardError: number }
  /** The next best explanation, when it is within 20 to 1. */
  runnerUp: null | { tensionNPerM: number, fundamentalHz: number, odds: number }
  warnings: ReadingWarning[]
}

export interface HeadTension { nPerM: number, u95NPerM: number, repeatabilityU95NPerM: number }

/** Both heads of a drum read together, from one tap on each. */
export interface BothHeadsReading {
  analysisVersion: string
  batter: HeadTension
  resonant: HeadTension
  /** Correlation of the two tensions' errors, -1 to 1. */
  correlation: number
  /** The coupled pair (0,1): both heads the same way, and against each other. measuredHz is null where it was not heard. */
  pair: { inPhase: PairTone, against: PairTone }
  modes: (MatchedMode & { tapped: HeadSide, side: HeadSide })[]
  confidence: number
  doubtful: boolean
  warnings: ReadingWarning[]
}

export interface PairTone { measuredHz: number | null, predictedHz: number }

/** Facts of the sound and what the page draws of it. */
export interface SoundFacts {
  durationS: number
  sampleRateHz: number
  channels: number
  bitDepth: string
  peakDbfs: number
  /** Pairs min, max per column over the whole recording, -1 to 1. */
  waveform: { columns: number, minMax: number[] }
  /** Level in dB (strongest = 0) on an even frequency grid, of the tap that was read; null where refused. */
  spectrum: null | { fromHz: number, stepHz: number, levelDb: number[] }
}
