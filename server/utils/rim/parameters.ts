import type { RimBasis } from '../../../shared/acoustics'

/** How the microphone stood: in one place for the whole round, or turned with the tap. */
export type MicrophoneKind = 'fixed' | 'following'

/** Where each unknown of the fit stands in one vector. */
export interface ParameterMap {
  count: number
  /** ln N_0. */
  tension: number
  /** a_k, b_k of harmonic k at harmonics + 2 (k - 2). */
  harmonics: number
  harmonicCount: number
  /** ln of the contact time, s, and r/R of the strikes: what all taps share. */
  contact: number
  radius: number
  /** Of family j: ln of its frequency over the model's, and ln of its decay rate, 1/s. */
  frequencies: number
  decays: number
  familyCount: number
  /** Real and imaginary part of what the microphone hears, of each shape or each family. */
  weights: number
  weightCount: number
  /** Of tap i: ln force, time after the found onset, s, ln contact time over the shared one, angle off the rod, rad, r/R off the shared one. */
  taps: number
  tapCount: number
}

export const PER_TAP = 5
export const TAP = { force: 0, time: 1, contact: 2, angle: 3, radius: 4 } as const

/** Lays out the unknowns of a round. */
export function parameterMap(basis: RimBasis, taps: number, microphone: MicrophoneKind): ParameterMap {
  const families = basis.families.length
  const weightCount = microphone === 'fixed' ? basis.size : families
  const harmonicCount = 2 * (basis.highest - 1)
  const harmonics = 1
  const contact = harmonics + harmonicCount
  const frequencies = contact + 2
  const decays = frequencies + families
  const weights = decays + families
  const tapsAt = weights + 2 * weightCount
  return {
    tension: 0, harmonics, harmonicCount, contact, radius: contact + 1, frequencies, decays, familyCount: families,
    weights, weightCount, taps: tapsAt, tapCount: taps, count: tapsAt + PER_TAP * taps,
  }
}
