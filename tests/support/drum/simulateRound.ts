/** One recording with a tap at every rod, in order, of the simulated drum: the same head, another place each time. */
import { finishRecording, tapLines, tapTruth } from './simulateTap'
import { renderLines } from './ring'
import { seededRandom } from './random'
import type { SimDrum, SimMicrophone, SimRecording, SimStrike, SimTruth } from './types'

export interface SimRound {
  drum: SimDrum
  rodCount: number
  /** What all taps share; the angle is set by the rod. */
  strike: Omit<SimStrike, 'angleRad'>
  /** With `follows` the microphone turns with the tap; otherwise its own angle stays. */
  microphone: SimMicrophone & { follows: boolean }
  recording: SimRecording & { spacingS?: number }
  /** Standard deviations of the tap's place, force and contact time from tap to tap. */
  scatter?: { radiusRatio: number, angleRad: number, force: number, contact: number }
}

export interface SimRoundResult { samples: Float64Array, sampleRateHz: number, truth: SimTruth & { tapsS: number[], rodTensionNPerM: number[] } }

/** Edge tension at an angle, N/m. */
export function rimTension(drum: SimDrum, angleRad: number): number {
  return drum.batter.tensionNPerM * (drum.unevenness ?? []).reduce((sum, h) => sum + h.ratio * Math.cos(h.k * (angleRad - h.phaseRad)), 1)
}

export function simulateRound(spec: SimRound): SimRoundResult {
  const { drum, rodCount, recording } = spec
  const sampleRateHz = recording.sampleRateHz ?? 48000
  const random = seededRandom(recording.seed + 7919)
  const quiet = Math.round((recording.quietS ?? 0.3) * sampleRateHz)
  const spacing = Math.round((recording.spacingS ?? 2) * sampleRateHz)
  const samples = new Float64Array(quiet + rodCount * spacing)
  const scatter = spec.scatter ?? { radiusRatio: 0.01, angleRad: 0.02, force: 0.1, contact: 0.08 }
  const tapsS: number[] = []
  let truth: SimTruth | undefined
  for (let rod = 0; rod < rodCount; rod++) {
    const angle = 2 * Math.PI * rod / rodCount
    const strike: SimStrike = {
      ...spec.strike,
      angleRad: angle + scatter.angleRad * random.normal(),
      radiusRatio: spec.strike.radiusRatio + scatter.radiusRatio * random.normal(),
      force: (spec.strike.force ?? 1) * Math.exp(scatter.force * random.normal()),
      contactS: (spec.strike.contactS ?? 0.003) * Math.exp(scatter.contact * random.normal()),
    }
    const microphone = spec.microphone.follows ? { ...spec.microphone, angleRad: angle } : spec.microphone
    const lines = tapLines(drum, strike, microphone, Math.min(3000, 0.45 * sampleRateHz))
    const from = quiet + rod * spacing
    const ring = renderLines(lines, strike, samples.length - from, sampleRateHz)
    for (let i = 0; i < ring.length; i++) samples[from + i]! += ring[i]!
    tapsS.push(from / sampleRateHz)
    truth ??= tapTruth(drum, strike, lines, from / sampleRateHz)
  }
  const rodTensionNPerM = Array.from({ length: rodCount }, (_, rod) => rimTension(drum, 2 * Math.PI * rod / rodCount))
  return { samples: finishRecording(samples, quiet, recording), sampleRateHz, truth: { ...truth!, tapsS, rodTensionNPerM } }
}
