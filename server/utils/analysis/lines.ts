/** One partial found in the ring of a tap: a decaying cosine, all figures at the start of the ring (about 8 ms after onset). */
export interface SpectralLine {
  /** Damped frequency, Hz. */
  frequencyHz: number
  /** Standard error of frequencyHz, Hz: noise and the room's tail as found in this recording. */
  standardErrorHz: number
  /** Amplitude at the start of the ring, in units of full scale. */
  amplitude: number
  /** Amplitude against the strongest decaying line, dB, <= 0 for decaying lines. */
  levelDb: number
  /** Decay rate: the amplitude falls as exp(-gamma t), 1/s, >= 0. T60 = 6.908 / gamma. */
  gammaPerS: number
  /** Phase of the cosine at the start of the ring, rad. */
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

/** Time in which a line with decay rate gammaPerS falls by 60 dB, s: ln(1000) / gamma. */
export function t60FromGamma(gammaPerS: number): number {
  return Math.log(1000) / gammaPerS
}
