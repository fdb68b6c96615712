import { describe, expect, it } from 'vitest'
import { toLowBand } from '../../../server/utils/analysis/decimate'
import { findTaps } from '../../../server/utils/analysis/taps'
import { tapSound, type TapPlan } from './support/synth'

const PARTIALS = [
  { frequencyHz: 142, amplitude: 0.2, gammaPerS: 9 },
  { frequencyHz: 226, amplitude: 0.25, gammaPerS: 7 },
  { frequencyHz: 303, amplitude: 0.1, gammaPerS: 8 },
]

function tapsOf(plan: Partial<TapPlan>) {
  const whole = { partials: PARTIALS, ...plan }
  return findTaps(toLowBand(Float32Array.from(tapSound(whole)), whole.sampleRateHz ?? 48_000))
}

describe('finding taps', () => {
  it.each([8000, 16_000, 44_100, 48_000, 96_000, 192_000])('finds one tap to a millisecond at %i samples a second', (sampleRateHz) => {
    const taps = tapsOf({ sampleRateHz, durationS: 1.5, noise: 1e-4 })
    expect(taps).toHaveLength(1)
    expect(Math.abs(taps[0]!.atS - 0.4)).toBeLessThan(0.001) // the contact itself lasts two
    expect(taps[0]!.doubled).toBe(false)
  })

  it('finds every tap of a round, and each rings until the next', () => {
    const tapsAtS = [0.3, 1.5, 2.8, 3.9, 5.2, 6.4, 7.7, 8.8]
    const taps = tapsOf({ tapsAtS, durationS: 10, noise: 1e-3 })
    expect(taps).toHaveLength(8)
    taps.forEach((tap, i) => {
      expect(Math.abs(tap.atS - tapsAtS[i]!)).toBeLessThan(0.002) // contact length
      expect(Math.abs(tap.endS - (tapsAtS[i + 1] ?? 10))).toBeLessThan(0.002) // contact length
    })
  })

  it.each([15, 20, 30, 40])('finds exactly one tap at %i dB over the noise, in a room', (snrDb) => {
    const power = PARTIALS.reduce((sum, p) => sum + p.amplitude ** 2 / 2, 0)
    for (let seed = 1; seed <= 8; seed++) {
      const taps = tapsOf({ noise: Math.sqrt(power * 10 ** (-snrDb / 10)), seed, room: { level: 0.2, t60S: 0.5 } })
      expect(taps).toHaveLength(1)
      expect(Math.abs(taps[0]!.atS - 0.4)).toBeLessThan(0.005) // noise hides the first part of the contact
    }
  })

  it('takes a recording that starts with the tap as a tap at its first sample', () => {
    const taps = tapsOf({ tapsAtS: [0], durationS: 2, noise: 1e-4 })
    expect(taps).toHaveLength(1)
    expect(taps[0]!.atS).toBeLessThan(0.002) // contact length
  })

  it('counts a bounce with its tap and says so', () => {
    const taps = tapsOf({ tapsAtS: [0.4, 0.46], noise: 1e-4, partials: PARTIALS.map(p => ({ ...p, gammaPerS: 60 })) })
    expect(taps).toHaveLength(1)
    expect(taps[0]!.doubled).toBe(true)
    expect(Math.abs(taps[0]!.lastHitS - 0.46)).toBeLessThan(0.002) // contact length
  })

  it('does not take beats for taps', () => {
    const taps = tapsOf({ noise: 1e-4, partials: [{ frequencyHz: 200, amplitude: 0.2, gammaPerS: 3 }, { frequencyHz: 206, amplitude: 0.2, gammaPerS: 3 }] })
    expect(taps).toHaveLength(1)
  })

  it('finds none in noise, in hum and in silence', () => {
    expect(tapsOf({ tapsAtS: [], noise: 0.05 })).toHaveLength(0)
    expect(tapsOf({ tapsAtS: [], noise: 0 })).toHaveLength(0)
    const hum = Float32Array.from({ length: 144_000 }, (_, n) => 0.2 * Math.sin(2 * Math.PI * 50 * n / 48_000) + 0.1 * Math.sin(2 * Math.PI * 150 * n / 48_000))
    expect(findTaps(toLowBand(hum, 48_000))).toHaveLength(0)
  })
})
