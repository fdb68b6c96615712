/** One decaying partial. */
export interface DecayingPartial {
  /** Damped frequency, Hz. */
  frequencyHz: number
  /** gamma: the amplitude falls as exp(-gamma t), 1/s, >= 0. */
  decayPerS: number
  /** Amplitude at t = 0, any unit. */
  amplitude: number
  /** Phase of the cosine at t = 0, rad; -pi/2 (a sine, as after a blow) where left out. */
  phaseRad?: number
}

export interface SynthesisOptions {
  partials: readonly DecayingPartial[]
  sampleRateHz: number
  durationS: number
  /** Silence before the blow, s. */
  startS?: number
  /** Time in which the sound rises smoothly, s; 0 where left out. */
  attackS?: number
}

/**
 * Sum of decaying cosines as samples: x(t) = sum A e^(-gamma t) cos(2 pi f t + phi), in the amplitudes' unit.
 *
 * Partials at or above half the sample rate are left out: they would fold down. Each partial runs as a complex rotation,
 * restarted every 4096 samples so that rounding does not build up.
 * Source: superposition of free modes (Fletcher & Rossing, The Physics of Musical Instruments, ch. 1).
 * @throws RangeError when the rate or duration is not finite and positive
 */
export function synthesise({ partials, sampleRateHz, durationS, startS = 0, attackS = 0 }: SynthesisOptions): Float32Array {
  if (!(Number.isFinite(sampleRateHz) && sampleRateHz > 0)) throw new RangeError(`sample rate must be positive, not ${sampleRateHz}`)
  if (!(Number.isFinite(durationS) && durationS > 0)) throw new RangeError(`duration must be positive, not ${durationS}`)
  const total = Math.round(durationS * sampleRateHz)
  const first = Math.min(total, Math.round(startS * sampleRateHz))
  const sum = new Float64Array(total)
  for (const { frequencyHz, decayPerS, amplitude, phaseRad = -Math.PI / 2 } of partials) {
    if (frequencyHz >= sampleRateHz / 2) continue
    const turn = 2 * Math.PI * frequencyHz / sampleRateHz
    const shrink = Math.exp(-decayPerS / sampleRateHz)
    const c = shrink * Math.cos(turn)
    const s = shrink * Math.sin(turn)
    let re = 0
    let im = 0
    for (let i = first; i < total; i++) {
      const k = i - first
      if (k % 4096 === 0) {
        const size = amplitude * Math.exp(-decayPerS * k / sampleRateHz)
        re = size * Math.cos(turn * k + phaseRad)
        im = size * Math.sin(turn * k + phaseRad)
      }
      sum[i] = sum[i]! + re
      const next = re * c - im * s
      im = re * s + im * c
      re = next
    }
  }
  const rise = Math.round(attackS * sampleRateHz)
  for (let k = 0; k < rise && first + k < total; k++) sum[first + k] = sum[first + k]! * Math.sin(Math.PI * k / (2 * rise)) ** 2
  return Float32Array.from(sum)
}
