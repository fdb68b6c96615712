/** A reading and the facts of its sound, as the analysis makes them, the database keeps them and the API gives them. Plain data. */

export type RefusalCode = 'silent' | 'clipped' | 'too-short' | 'low-rate' | 'no-tap' | 'not-a-drum' | 'not-wav' | 'too-large'

export interface Refusal { code: RefusalCode, message: string }

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
}

export interface UnexplainedPeak { frequencyHz: number, levelDb: number, t60S: number, cause?: string }

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
  /** The next best explanation, when it is close. */
  runnerUp: null | { tensionNPerM: number, fundamentalHz: number, odds: number }
  warnings: ReadingWarning[]
}

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
