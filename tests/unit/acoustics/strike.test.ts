import { describe, expect, it } from 'vitest'
import { airAt, besselStrikeWeight, contactPulseGain, createDrumModel, fourierBesselCoefficients, besselJ, besselZero, patchFactor, strikeAmplitudes, synthesise } from '../../../shared/acoustics'
import parabola from '../../reference/fourier-bessel-parabola.json'

describe('Fourier-Bessel coefficients', () => {
  it('of a parabola are the textbook ones', () => {
    const found = fourierBesselCoefficients({ shape: x => 1 - x * x, count: 8 })
    // Source: tests/reference/fourier-bessel-parabola.json (mpmath; closed form 8 / (alpha^3 J_1(alpha))).
    parabola.values.forEach((value, i) => expect(Math.abs(found[i]! - value)).toBeLessThan(1e-13)) // Gauss nodes reach rounding
  })

  it('add up to the shape again, for a plucked cone and for cos 2 theta', () => {
    const cone = fourierBesselCoefficients({ shape: x => Math.max(0, 1 - x / 0.5), count: 40, kinks: [0.5] })
    const sum = (x: number) => cone.reduce((total, a, i) => total + a * besselJ(0, besselZero(0, i + 1) * x), 0)
    expect(sum(0.25)).toBeCloseTo(0.5, 2) // 40 terms of a series that falls as n^-1.5
    const dome = fourierBesselCoefficients({ shape: x => x * x * (1 - x), m: 2, count: 30 })
    const at = dome.reduce((total, a, i) => total + a * besselJ(2, besselZero(2, i + 1) * 0.6), 0)
    expect(at).toBeCloseTo(0.144, 4) // 0.36 * 0.4; 30 terms
  })
})

describe('a blow', () => {
  it('at the centre sounds only modes without nodal diameters', () => {
    expect(besselStrikeWeight(0, 1, 0, 0.05)).toBeGreaterThan(0.9)
    for (const m of [1, 2, 5]) expect(besselStrikeWeight(m, 1, 0, 0.05)).toBe(0)
  })

  it('on a nodal circle leaves that mode silent', () => {
    const node = besselZero(0, 1) / besselZero(0, 2)
    expect(besselStrikeWeight(0, 2, node, 0.05)).toBeCloseTo(0, 12) // J_0 at its own zero: rounding
  })

  it('with a wide patch averages the shape over the patch', () => {
    // Mean of J_3(k r) cos 3 theta over a disc of radius a around r0, by brute force on a polar grid of the disc.
    const [k, r0, a] = [9, 0.55, 0.2]
    let sum = 0
    const [rings, spokes] = [200, 64]
    for (let i = 0; i < rings; i++) for (let j = 0; j < spokes; j++) {
      const s = a * Math.sqrt((i + 0.5) / rings)
      const x = r0 + s * Math.cos(2 * Math.PI * j / spokes)
      const y = s * Math.sin(2 * Math.PI * j / spokes)
      sum += besselJ(3, k * Math.hypot(x, y)) * Math.cos(3 * Math.atan2(y, x))
    }
    expect(besselJ(3, k * r0) * patchFactor(k * a)).toBeCloseTo(sum / (rings * spokes), 5) // midpoint rule with 200 rings
  })

  it('of finite length is a low-pass with its first zero at 3 / (2 tau)', () => {
    expect(contactPulseGain(0, 0.005)).toBe(1)
    expect(contactPulseGain(100, 0.005)).toBeCloseTo(Math.PI / 4, 9) // Source: limit of cos(pi x/2)/(1-x^2) at x = 1
    expect(contactPulseGain(100.0001, 0.005)).toBeCloseTo(Math.PI / 4, 5) // continuous through the limit
    expect(contactPulseGain(300, 0.005)).toBeCloseTo(0, 12) // 3 / (2 * 0.005 s) = 300 Hz: rounding
  })

  it('at the edge sounds the other modes more than the lowest', () => {
    const film = { plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475 }
    const model = createDrumModel({ geometry: { construction: 'fixture', radiusM: 0.165, depthM: 0 }, film, air: airAt({ temperatureC: 20 }) })
    const modes = model.predictModes({ tensionNPerM: 3000, maxHz: 500 })
    const amplitude = (radialPosition: number, m: number) => Math.abs(strikeAmplitudes({ modes, radiusM: 0.165, arealDensityKgM2: 0.3475, strike: { radialPosition, contactRatio: 0.03, contactTimeS: 0.001 } })[modes.findIndex(mode => mode.m === m)]!)
    expect(amplitude(0.8, 1)).toBeGreaterThan(amplitude(0.8, 0))
    expect(amplitude(0.05, 0)).toBeGreaterThan(5 * amplitude(0.05, 1))
  })
})

describe('synthesis', () => {
  it('gives the decaying cosine it is asked for, to the last sample', () => {
    const samples = synthesise({ partials: [{ frequencyHz: 123.4, decayPerS: 3, amplitude: 0.5, phaseRad: 0.3 }], sampleRateHz: 8000, durationS: 2 })
    expect(samples.length).toBe(16_000)
    for (const i of [0, 1, 4095, 4096, 9999, 15_999]) {
      const t = i / 8000
      expect(samples[i]).toBeCloseTo(0.5 * Math.exp(-3 * t) * Math.cos(2 * Math.PI * 123.4 * t + 0.3), 6) // single precision
    }
  })

  it('leaves out what would fold down and keeps the silence before the blow', () => {
    const samples = synthesise({ partials: [{ frequencyHz: 5000, decayPerS: 3, amplitude: 1 }, { frequencyHz: 200, decayPerS: 3, amplitude: 1 }], sampleRateHz: 8000, durationS: 0.5, startS: 0.1 })
    expect(samples.slice(0, 800).every(v => v === 0)).toBe(true)
    expect(samples[810]).toBeCloseTo(Math.exp(-3 * 10 / 8000) * Math.sin(2 * Math.PI * 200 * 10 / 8000), 6) // single precision
  })
})
