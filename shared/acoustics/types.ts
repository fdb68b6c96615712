/** What the acoustics core takes and gives. SI throughout; units stand in the names. */

/** How the air stands around a head; physics.md calls it the construction. */
export type DrumConstruction = 'open' | 'frame' | 'double-headed' | 'kettle' | 'fixture'

export interface DrumGeometry {
  construction: DrumConstruction
  /** R, radius of the vibrating part, inside the bearing edge, m, > 0. */
  radiusM: number
  /** L, shell depth, m, >= 0; not used for frame, fixture and kettle. */
  depthM: number
  /** V, bowl volume, m3, > 0; needed for a kettle. */
  bowlVolumeM3?: number
}

export interface HeadFilm {
  /** Number of plies, >= 1; they slide on each other. */
  plies: number
  /** Thickness of one ply, m, > 0. */
  plyThicknessM: number
  /** Density of the film, kg/m3, > 0. */
  filmDensityKgM3: number
  /** E, Young's modulus, Pa, > 0. */
  modulusPa: number
  /** nu, Poisson ratio, -1 < nu < 0.5. */
  poisson: number
  /** Yield stress, Pa, > 0. */
  yieldPa: number
  /** sigma, mass per area of the whole head, coating included, kg/m2, > 0. */
  arealDensityKgM2: number
}

export interface Air {
  /** rho0, kg/m3. */
  densityKgM3: number
  /** c0, m/s. */
  soundSpeedMPerS: number
}

/** Factors on the air's added mass, 1 = as the model predicts; a cavity's spring is not scaled. */
export interface AirScale {
  /** For m = 0. */
  axisymmetric: number
  /** For every m >= 1. */
  others: number
}

export interface DrumModelOptions {
  geometry: DrumGeometry
  /** The struck head. */
  film: HeadFilm
  /** The other head of a double-headed drum; the struck head's film where left out. */
  otherFilm?: HeadFilm
  air: Air
  airScale?: AirScale
  /** c in R - c sqrt(D/T): 0 hinged, 1 clamped; 0.5 where left out (the film runs on over the edge). */
  edgeFactor?: number
}

/** Logarithmic derivatives d ln f / d ln x of one mode's frequency, dimensionless. */
export interface ModeSensitivity {
  lnTension: number
  lnOtherTension: number
  /** By the air's added mass of the mode's own group (m = 0, or m >= 1). */
  lnAirScale: number
  /** By the areal density of the struck head, and of the other. */
  lnArealDensity: number
  lnOtherArealDensity: number
  /** By the edge factor c itself: d ln f / d c. */
  edgeFactor: number
}

export interface PredictedMode {
  /** Nodal diameters, >= 0. */
  m: number
  /** Nodal circles, the rim counted, >= 1; 0 for a resonance of the shell's air that carries a head along. */
  n: number
  /** Resonances of the shell's air only: number within its m, in order of frequency, and share of its energy in the films. */
  air?: { index: number, filmShare: number }
  /** The head that moves most. */
  head: 'struck' | 'other'
  /** Undamped frequency sqrt(omega_d^2 + gamma^2) / (2 pi) with air, bending and edge, Hz; radiation moves it a little. */
  frequencyHz: number
  /** The same if the air took no energy away, Hz. */
  losslessHz: number
  /** Frequency of the same mode without air, bending or edge, Hz. */
  idealHz: number
  /** The air's mass per area, as the mode feels it (negative where the air acts as a spring), kg/m2. */
  addedMassKgM2: number
  /** Decay rate of the amplitude by radiation alone, 1/s. */
  radiationDampingPerS: number
  /** Coefficients of the struck head's normalised shapes (m,1), (m,2), ...; sum over both heads of squares = 1. */
  struckShape: Float64Array
  /** The same for the other head; empty for one head. */
  otherShape: Float64Array
  sensitivity: ModeSensitivity
}

export interface PredictOptions {
  /** T of the struck head, N/m, > 0. */
  tensionNPerM: number
  /** T of the other head, N/m, > 0; the struck head's where left out. */
  otherTensionNPerM?: number
  /** Modes above this are left out, Hz. */
  maxHz?: number
  /** Factors on the added mass for this prediction only. */
  airScale?: AirScale
  /** Edge factor for this prediction only. */
  edgeFactor?: number
  /** Several times faster, frequencies good to 0.1 %: for searches. */
  rough?: boolean
  /** Give resonances of the shell's air too, as far as they carry a head along. */
  airModes?: boolean
  /** Only these nodal diameters; all where left out. */
  nodalDiameters?: readonly number[]
}

export interface DrumModel {
  readonly options: Readonly<DrumModelOptions>
  /** Modes in order of frequency. @throws RangeError when a tension is not finite and positive */
  predictModes(options: PredictOptions): PredictedMode[]
  /** Frequency of the lowest mode without nodal diameters, (0,1), Hz; of two heads, the lower of their two. */
  fundamentalHz(tensionNPerM: number, otherTensionNPerM?: number): number
  /** Tension of the struck head at which fundamentalHz gives this frequency, N/m. @throws RangeError when none does */
  tensionForFundamental(frequencyHz: number, otherTensionNPerM?: number): number
}
