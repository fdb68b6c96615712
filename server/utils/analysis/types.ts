/** What goes into and comes out of the analysis. Plain data: it crosses a thread boundary and is stored as JSON. */

import type { AnalysedReading, HeadCalibration, HeadSide, Refusal, SoundFacts } from '../../../shared/types/reading'

export type Construction = 'open' | 'frame' | 'double-headed' | 'kettle' | 'fixture'
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
  /** What the maker measured better than by tape and data sheet; of the struck head. */
  uncertainty?: InputUncertainty
  /** What a reading at a known tension taught of this instrument with the struck head on it. */
  calibration?: HeadCalibration
}

/** Standard uncertainties of the maker's figures. */
export interface InputUncertainty {
  /** Of the vibrating diameter, mm; 0.1 % of it where left out. */
  diameterMm?: number
  /** Of the struck head's areal density, as a share of it; 0.01 where left out. */
  arealDensityRelative?: number
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
