/** What goes into and comes out of the analysis. Plain data: it crosses a thread boundary and is stored as JSON. */

export type Construction = 'open' | 'frame' | 'double-headed' | 'kettle' | 'fixture'
export type HeadSide = 'batter' | 'resonant'
export type Strike = 'centre' | 'edge' | 'round'

/** One head as the analysis sees it; SI. */
export interface AnalysedHead {
  side: HeadSide
  material: 'pet' | 'skin' | 'woven' | 'other'
  plies: number
  /** One ply's thickness, m. */
  plyThicknessM: number
  filmDensityKgM3: number
  modulusPa: number
  poisson: number
  yieldPa: number
  /** Areal density of the whole head, coating included, kg/m2. */
  arealDensityKgM2: number
}

/** The instrument as the analysis sees it; SI. */
export interface AnalysedInstrument {
  construction: Construction
  /** Vibrating radius, m. */
  radiusM: number
  /** Shell depth, m; 0 is allowed for frame and fixture. */
  depthM: number
  /** Bowl volume of a kettle, m3; undefined for others. */
  bowlVolumeM3?: number
  rodCount: number
  heads: AnalysedHead[]
}

export interface AnalysisRequest {
  /** The file's bytes, RIFF/WAVE. */
  wav: Uint8Array
  instrument: AnalysedInstrument
  /** Which head was struck. */
  side: HeadSide
  strike: Strike
  /** Rod nearest the strike (edge), counted clockwise seen from above, from 1. */
  rod?: number
  firstRod: number
  /** A finger rested on the centre. */
  centreDamped: boolean
  temperatureC: number
}

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

export type AnalysisOutcome
  = | { kind: 'read', sound: SoundFacts, reading: AnalysedReading, timingsMs: Record<string, number> }
    | { kind: 'refused', sound: SoundFacts | null, refusal: Refusal, timingsMs: Record<string, number> }
