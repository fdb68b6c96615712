/** What goes into and comes out of the analysis. Plain data: it crosses a thread boundary and is stored as JSON. */

import type { AnalysedReading, Refusal, SoundFacts } from '../../../shared/types/reading'

export type { AnalysedReading, BudgetLine, MatchedMode, ReadingWarning, Refusal, RefusalCode, RodTension, SoundFacts, UnexplainedPeak } from '../../../shared/types/reading'

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

export type AnalysisOutcome
  = | { kind: 'read', sound: SoundFacts, reading: AnalysedReading, timingsMs: Record<string, number> }
    | { kind: 'refused', sound: SoundFacts | null, refusal: Refusal, timingsMs: Record<string, number> }
