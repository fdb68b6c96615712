import { describe, expect, it } from 'vitest'
import { hann, noiseBandwidthBins, powerOf, ringWindow, spectrumOf } from '../../../server/utils/analysis/spectrum'

/** Response of a window to a tone `offset` bins away, dB against a tone on the bin; straight from the definition. */
function responseDb(window: Float64Array, offset: number): number {
  let re = 0
  let im = 0
  let sum = 0
  window.forEach((w, n) => {
    re += w * Math.cos(2 * Math.PI * offset * n / window.length)
    im += w * Math.sin(2 * Math.PI * offset * n / window.length)
    sum += w
  })
  return 20 * Math.log10(Math.hypot(re, im) / sum)
}

describe('the Hann window', () => {
  const window = hann(1024)

  // Harris, Proc. IEEE 66 (1978) 51, table 1, Hanning alpha = 2: 1.50 bins, 1.42 dB, -32 dB.
  it('has a noise bandwidth of 1.50 bins', () => {
    expect(noiseBandwidthBins(window)).toBeCloseTo(1.5, 2) // the table gives two decimals
  })

  it('loses 1.42 dB for a tone half-way between bins', () => {
    expect(-responseDb(window, 0.5)).toBeCloseTo(1.42, 2) // the table gives two decimals
  })

  it('has its highest side lobe at -32 dB', () => {
    const lobes = Array.from({ length: 400 }, (_, i) => responseDb(window, 2.02 + i / 100))
    expect(Math.max(...lobes)).toBeGreaterThan(-32.5) // the table is rounded to whole dB
    expect(Math.max(...lobes)).toBeLessThan(-31.4) // as above; the exact value is -31.5 dB
  })
})

describe('the ring window', () => {
  it('starts and ends at nothing and stands at one after its rise', () => {
    const window = ringWindow(2000, 200)
    expect(window[0]!).toBeLessThan(1e-4) // (pi / 400)^2 / 4
    expect(window[1999]!).toBeLessThan(1e-6) // (pi / 3600)^2 / 4
    expect(window[200]!).toBeGreaterThan(0.999) // half a sample past the top of its fall
  })
})

describe('spectra', () => {
  it('hold the energy of the signal (Parseval)', () => {
    const samples = Float64Array.from({ length: 1000 }, (_, n) => Math.sin(n * n / 300) + 0.3)
    const power = powerOf(spectrumOf(samples, 8000))
    const inSpectrum = power.reduce((sum, p, k) => sum + p * (k === 0 || k === power.length - 1 ? 1 : 2), 0) / 1024
    const inTime = samples.reduce((sum, x) => sum + x * x, 0)
    expect(inSpectrum / inTime).toBeCloseTo(1, 10) // double rounding over a thousand terms
  })

  it('agree with the defining sum at any bin', () => {
    const samples = Float64Array.from({ length: 300 }, (_, n) => Math.cos(n ** 1.3))
    const { bins, size, stepHz } = spectrumOf(samples, 8000, undefined, 600)
    expect(size).toBe(1024)
    expect(stepHz).toBe(8000 / 1024)
    for (const k of [0, 1, 77, 511]) {
      let re = 0
      let im = 0
      samples.forEach((x, n) => {
        re += x * Math.cos(2 * Math.PI * k * n / size)
        im -= x * Math.sin(2 * Math.PI * k * n / size)
      })
      expect(Math.hypot(bins[2 * k]! - re, bins[2 * k + 1]! - im)).toBeLessThan(1e-10) // double rounding
    }
  })
})
