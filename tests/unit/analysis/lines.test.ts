import { describe, expect, it } from 'vitest'
import { findLines, t60FromGamma, type SpectralLine } from '../../../server/utils/analysis/lines'
import { frequencyBoundHz } from './support/bound'
import { gaussian, tapSound, type Partial } from './support/synth'

const RATE = 12_000

/** Decaying tones from their first sample on, with white noise: what findLines is given. */
function ringOf(partials: Partial[], noise: number, seed: number, seconds = 1.2) {
  const samples = new Float64Array(seconds * RATE)
  for (const p of partials) {
    for (let n = 0; n < samples.length; n++) samples[n]! += p.amplitude * Math.exp(-p.gammaPerS * n / RATE) * Math.cos(2 * Math.PI * p.frequencyHz * n / RATE + (p.phaseRad ?? 0))
  }
  const normal = gaussian(seed)
  for (let n = 0; n < samples.length; n++) samples[n]! += noise * normal()
  return { samples, sampleRateHz: RATE, passHz: 4800, noisePower: noise ** 2 }
}

const nearest = (lines: SpectralLine[], hz: number) => lines.reduce((a, b) => (Math.abs(b.frequencyHz - hz) < Math.abs(a.frequencyHz - hz) ? b : a))
const rms = (values: number[]) => Math.sqrt(values.reduce((sum, v) => sum + v * v, 0) / values.length)

describe('the frequency of one line', () => {
  it.each([
    { name: 'a long ring at 20 dB', gammaPerS: 4, snrDb: 20 },
    { name: 'a usual ring at 30 dB', gammaPerS: 12, snrDb: 30 },
    { name: 'a short ring at 40 dB', gammaPerS: 40, snrDb: 40 },
    { name: 'a ring that air damps hard, at 30 dB', gammaPerS: 90, snrDb: 30 },
  ])('is as good as noise allows for $name, and its stated error is honest', ({ gammaPerS, snrDb }) => {
    const errors: number[] = []
    const scores: number[] = []
    let bound = 0
    for (let seed = 1; seed <= 60; seed++) {
      const tone = { frequencyHz: 180 + 3.7 * seed, amplitude: 0.2, gammaPerS, phaseRad: seed }
      const noise = 0.2 / Math.SQRT2 * 10 ** (-snrDb / 20)
      const line = nearest(findLines(ringOf([tone], noise, seed)).lines, tone.frequencyHz)
      bound = frequencyBoundHz(tone, noise, 1.2 * RATE, RATE)
      errors.push((line.frequencyHz - tone.frequencyHz) / bound)
      scores.push((line.frequencyHz - tone.frequencyHz) / line.standardErrorHz)
    }
    // The rms of 60 errors scatters by 9 %; three times that on either side, and a tenth for the part of the line that its band leaves out.
    expect(rms(errors)).toBeGreaterThan(0.73)
    expect(rms(errors)).toBeLessThan(1.4)
    expect(rms(scores)).toBeLessThan(1.4) // stated error not smaller than the true one, same scatter
    expect(rms(scores)).toBeGreaterThan(0.4) // nor more than 2.5 times as large: a tail 40 dB down cannot be told from none here, and counts
  })

  it('comes with its level, decay and phase', () => {
    const partials = [{ frequencyHz: 210, amplitude: 0.2, gammaPerS: 9, phaseRad: 1.1 }, { frequencyHz: 333, amplitude: 0.05, gammaPerS: 15, phaseRad: -0.4 }]
    const { lines, explainedShare } = findLines(ringOf(partials, 1e-5, 4))
    expect(lines).toHaveLength(2)
    partials.forEach((p, i) => {
      const line = lines[i]!
      expect(line.amplitude / p.amplitude).toBeCloseTo(1, 2) // noise is 70 dB down
      expect(line.gammaPerS / p.gammaPerS).toBeCloseTo(1, 2) // noise is 70 dB down
      expect(line.phaseRad).toBeCloseTo(p.phaseRad, 2) // noise is 70 dB down
    })
    expect(lines[1]!.levelDb).toBeCloseTo(20 * Math.log10(0.25), 1) // a tenth of a dB
    expect(explainedShare).toBeGreaterThan(0.999) // all of it is lines
  })

  it('turns decay into a time: gamma = 6.908 / s falls by 60 dB in a second', () => {
    expect(t60FromGamma(6.907755)).toBeCloseTo(1, 6) // ln 1000 to seven figures
  })
})

describe('lines that stand close', () => {
  it.each([3, 5, 9])('are told apart at %i Hz', (apart) => {
    for (let seed = 1; seed <= 6; seed++) {
      const pair = [{ frequencyHz: 240, amplitude: 0.2, gammaPerS: 8, phaseRad: seed }, { frequencyHz: 240 + apart, amplitude: 0.13, gammaPerS: 9, phaseRad: 2.3 * seed }]
      const { lines } = findLines(ringOf([...pair, { frequencyHz: 390, amplitude: 0.1, gammaPerS: 12 }], 2e-4, seed))
      expect(lines).toHaveLength(3)
      pair.forEach(p => expect(Math.abs(nearest(lines, p.frequencyHz).frequencyHz - p.frequencyHz)).toBeLessThan(0.1)) // 3 % of the smallest distance
    }
  })

  it('are not made up: one line in noise stays one', () => {
    for (let seed = 1; seed <= 30; seed++) {
      const { lines } = findLines(ringOf([{ frequencyHz: 200 + seed, amplitude: 0.2, gammaPerS: 10, phaseRad: seed }], 4e-3, seed))
      expect(lines).toHaveLength(1)
    }
  })

  it('are not made up in a room: no second line within 12 dB beside a single one', () => {
    for (let seed = 1; seed <= 10; seed++) {
      const at = 230 + 7 * seed
      const sound = tapSound({ sampleRateHz: RATE, durationS: 2, tapsAtS: [0], partials: [{ frequencyHz: at, amplitude: 0.2, gammaPerS: 9 }], noise: 1e-4, seed, room: { level: 0.1, t60S: 0.4 } })
      const { lines } = findLines({ samples: sound.slice(100), sampleRateHz: RATE, passHz: 4800, noisePower: 1e-8 })
      expect(lines.filter(l => l.levelDb > -12 && Math.abs(l.frequencyHz - at) < 12)).toHaveLength(1)
    }
  })

  it('leave a weak line standing between strong ones', () => {
    const partials = [{ frequencyHz: 142, amplitude: 0.3, gammaPerS: 60 }, { frequencyHz: 226, amplitude: 0.2, gammaPerS: 10 }, { frequencyHz: 262, amplitude: 0.004, gammaPerS: 8 }, { frequencyHz: 303, amplitude: 0.2, gammaPerS: 9 }]
    const { lines } = findLines(ringOf(partials, 1e-4, 2))
    partials.forEach(p => expect(Math.abs(nearest(lines, p.frequencyHz).frequencyHz - p.frequencyHz)).toBeLessThan(0.3)) // a twentieth of the narrowest line's width
  })
})

describe('sounds that are always there', () => {
  it.each([50, 60])('marks mains hum at multiples of %i Hz as steady and leaves the drum its lines', (mains) => {
    const hum = [1, 2, 3].map(k => ({ frequencyHz: mains * k, amplitude: 0.02 / k, gammaPerS: 0, phaseRad: k }))
    const drum = [{ frequencyHz: 137, amplitude: 0.2, gammaPerS: 10 }, { frequencyHz: 219, amplitude: 0.2, gammaPerS: 8 }]
    const { lines } = findLines(ringOf([...hum, ...drum], 2e-4, 7, 2))
    hum.forEach(h => expect(nearest(lines, h.frequencyHz).steady).toBe(true))
    drum.forEach((d) => {
      const line = nearest(lines, d.frequencyHz)
      expect(line.steady).toBe(false)
      expect(Math.abs(line.frequencyHz - d.frequencyHz)).toBeLessThan(0.05) // hum 10 dB down and 13 Hz off must not pull it
    })
    expect(Math.max(...lines.filter(l => !l.steady).map(l => l.levelDb))).toBe(0)
  })
})

describe('what could have been heard', () => {
  it('says how weak a line would have been found: one just above is, one well below is not', () => {
    const strong = { frequencyHz: 200, amplitude: 0.2, gammaPerS: 10 }
    const { detection, fromHz } = findLines(ringOf([strong], 2e-3, 5))
    const levelDb = detection.levelDb[Math.floor((800 - fromHz) / detection.stepHz)]!
    let above = 0
    let below = 0
    for (let seed = 1; seed <= 20; seed++) {
      const weak = (db: number) => ({ frequencyHz: 800, amplitude: 0.2 * 10 ** (db / 20), gammaPerS: 10, phaseRad: seed })
      const found = (db: number) => findLines(ringOf([strong, weak(db)], 2e-3, seed)).lines.some(l => Math.abs(l.frequencyHz - 800) < 3)
      if (found(levelDb + 4)) above++
      if (found(levelDb - 8)) below++
    }
    expect(above).toBeGreaterThanOrEqual(18) // nine of ten
    expect(below).toBeLessThanOrEqual(4) // a fifth: noise may lift one
  })
})
