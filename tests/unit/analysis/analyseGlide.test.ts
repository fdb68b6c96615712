import { describe, expect, it } from 'vitest'
import { toLowBand } from '../../../server/utils/analysis/decimate'
import { hearTap } from '../../../server/utils/analysis/listen'
import { findTaps } from '../../../server/utils/analysis/taps'
import { gaussian, tapSound } from './support/synth'

const RATE = 48_000

/** A mode whose pitch rises with the square of its own amplitude: f = rest (1 + rise exp(-2 gamma t)), Fletcher & Rossing ch. 3. */
function glidingTap(restHz: number, gammaPerS: number, rise: number): Float64Array {
  const out = new Float64Array(1.6 * RATE)
  const normal = gaussian(5)
  const first = 0.3 * RATE
  let phase = 0
  for (let n = 0; n < out.length; n++) {
    out[n] = 1e-4 * normal()
    if (n < first) continue
    const t = (n - first) / RATE
    phase += 2 * Math.PI * restHz * (1 + rise * Math.exp(-2 * gammaPerS * t)) / RATE
    out[n]! += 0.4 * Math.exp(-gammaPerS * t) * Math.sin(phase) + 0.03 * Math.exp(-14 * t) * Math.sin(2.9 * phase)
  }
  return out
}

/** Modes of one film whose tension rises with the first one's energy: all stand sharp by the same share. */
const MODES = [{ hz: 128, gammaPerS: 24, amplitude: 0.4 }, { hz: 259, gammaPerS: 12, amplitude: 0.12 }, { hz: 371, gammaPerS: 15, amplitude: 0.1 }, { hz: 668, gammaPerS: 30, amplitude: 0.08 }]
const RISE_PER_S = 48

function softerGlide(rise: number, seed: number): Float64Array {
  const out = new Float64Array(1.6 * RATE)
  const normal = gaussian(seed)
  const first = 0.3 * RATE
  for (let n = 0; n < out.length; n++) {
    out[n] = 1e-3 * normal()
    const t = (n - first) / RATE
    if (t < 0) continue
    const atRest = t + rise * (1 - Math.exp(-RISE_PER_S * t)) / RISE_PER_S
    for (const mode of MODES) out[n]! += mode.amplitude * Math.exp(-mode.gammaPerS * t) * Math.sin(2 * Math.PI * mode.hz * atRest)
  }
  return out
}

function hear(samples: Float64Array) {
  const band = toLowBand(samples, RATE)
  return hearTap(band, findTaps(band)[0]!)
}

describe('a stroke so hard that the pitch glides', () => {
  it.each([0.06, 0.1, 0.15])('and starts %d of the pitch too sharp is read close to its pitch at rest', (rise) => {
    const heard = hear(glidingTap(98, 7, rise))
    const strongest = heard.findings.lines.find(l => l.levelDb === 0)!
    expect(Math.abs(strongest.frequencyHz / 98 - 1)).toBeLessThan(0.12 * rise) // a constant tone stands a quarter of the rise sharp: half of that, the first order's own doubt of the rate
  })

  it('is told of', () => {
    const { glideShare } = hear(glidingTap(98, 7, 0.15))
    expect(glideShare).toBeGreaterThan(0.05) // a third: the loudest step of the fit stands somewhere on the way down
    expect(glideShare).toBeLessThan(0.15) // never more than there was
  })

  it.each([0.01, 0.02, 0.04])('and starts only %d of the pitch too sharp has its lines read at rest, within their own errors', (rise) => {
    const heard = hear(softerGlide(rise, 11))
    expect(heard.glideShare).toBeGreaterThan(0.4 * rise) // exp(-48 * 0.012 s) = 0.56 of it is left where listening begins; the rest is the rate's doubt
    expect(heard.glideShare).toBeLessThan(rise) // never more than there was
    for (const mode of MODES) {
      const line = heard.findings.lines.filter(l => Math.abs(l.frequencyHz / mode.hz - 1) < 0.03).reduce((a, b) => (b.levelDb > a.levelDb ? b : a))
      expect(Math.abs(line.frequencyHz / mode.hz - 1), `${mode.hz} Hz`).toBeLessThan(0.05 * rise + 2e-4) // constant tones stand 0.1 to 0.3 of the rise sharp; 2e-4 is the noise
      expect(Math.abs(line.frequencyHz - mode.hz), `${mode.hz} Hz`).toBeLessThan(4 * line.standardErrorHz) // four standard errors, of twelve lines
    }
  })

  it('is not found where taps are soft: pairs and neighbours stay what they are', () => {
    const partials = [
      { frequencyHz: 141, amplitude: 0.12, gammaPerS: 35 }, { frequencyHz: 244, amplitude: 0.2, gammaPerS: 11 }, { frequencyHz: 249, amplitude: 0.15, gammaPerS: 12 },
      { frequencyHz: 339, amplitude: 0.15, gammaPerS: 9 }, { frequencyHz: 364, amplitude: 0.06, gammaPerS: 22 },
    ]
    for (let seed = 1; seed <= 5; seed++) {
      const heard = hear(tapSound({ partials, noise: 1e-3, durationS: 2, seed, room: { level: 0.15, t60S: 0.4 } }))
      expect(heard.delayS).toBe(0)
      expect(heard.glideShare).toBe(0)
    }
  })
})
