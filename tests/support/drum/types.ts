/** What the simulated drum is made of, how it is struck and heard. SI throughout. */

export type SimConstruction = 'fixture' | 'open' | 'frame' | 'kettle' | 'double-headed'

export interface SimHead {
  tensionNPerM: number
  plies: number
  plyThicknessM: number
  filmDensityKgM3: number
  modulusPa: number
  poisson: number
  /** Of the whole head, coating included. */
  arealDensityKgM2: number
}

/** Edge tension N(theta) = N0 (1 + sum ratio_k cos k(theta - phase_k)), k >= 2. */
export interface SimHarmonic { k: number, ratio: number, phaseRad: number }

export interface SimDrum {
  construction: SimConstruction
  radiusM: number
  depthM: number
  bowlVolumeM3?: number
  batter: SimHead
  resonant?: SimHead
  /** c of the effective radius R - c sqrt(D/T): hidden from the analysis. Default 0.5. */
  edgeTerm?: number
  /** Of the batter head. */
  unevenness?: SimHarmonic[]
  temperatureC?: number
  pressurePa?: number
  /** Amplitude decay of the film itself: gamma = lossPerS + lossPerHz f. */
  lossPerS?: number
  lossPerHz?: number
}

export interface SimStrike {
  side?: 'batter' | 'resonant'
  /** Place, as a share of the radius, and angle (counted like the rods). */
  radiusRatio: number
  angleRad?: number
  patchM?: number
  contactS?: number
  /** A finger on the centre: extra decay of what moves there. */
  centreDamped?: boolean
  /** Rise of tension at the loudest moment, as a share of the tension at rest (pitch glide). */
  glide?: number
  force?: number
}

export interface SimMicrophone { radiusRatio: number, angleRad?: number, heightM: number }

export interface SimRoom { levelDb: number, t60S: number }

export interface SimRecording {
  seed: number
  sampleRateHz?: number
  quietS?: number
  ringS?: number
  /** Mean power of the first 0.5 s of the tap over the noise's. */
  snrDb?: number
  hum?: { hz: number, snrDb: number }
  room?: SimRoom
  /** Peak of the whole recording. */
  peakDbfs?: number
}

export interface SimTap { drum: SimDrum, strike: SimStrike, microphone: SimMicrophone, recording: SimRecording }

export interface SimMode {
  m: number
  /** 0 for a resonance of the shell's air that carries the film along. */
  n: number
  head: 'batter' | 'resonant'
  hz: number
  gammaPerS: number
  /** Peak pressure share of this mode in the recording, relative to the loudest mode, dB. */
  levelDb: number
}

export interface SimTruth {
  tensionNPerM: number
  resonantTensionNPerM?: number
  /** (0,1) of the free head; of a coupled pair the lower. */
  fundamentalHz: number
  /** Every resonance that moves mostly as (0,1): two where the shell's air or a second head splits it. */
  fundamentalBranchesHz: number[]
  modes: SimMode[]
  onsetS: number
  /** Rise of the struck head's pitch at the start, as a share of the pitch at rest, of the fundamental. */
  glideShare: number
}

export interface SimResult { samples: Float64Array, sampleRateHz: number, truth: SimTruth }

/** Bending stiffness of a head whose plies slide on one another: the sum of theirs. */
export function bendingStiffness(head: SimHead): number {
  return head.plies * head.modulusPa * head.plyThicknessM ** 3 / (12 * (1 - head.poisson ** 2))
}

/** Dry air as an ideal gas. */
export function simAir(drum: SimDrum): { density: number, sound: number } {
  const kelvin = (drum.temperatureC ?? 20) + 273.15
  return { density: (drum.pressurePa ?? 101325) / (287.05 * kelvin), sound: Math.sqrt(1.4 * 287.05 * kelvin) }
}
