import { describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import type { ExplainLines } from '../../../server/utils/analysis/explanation'
import { soxFile, speech } from './support/outsideTools'
import { requestFor } from './support/request'
import { gaussian, tapSound, type TapPlan } from './support/synth'
import { wavFile } from './support/wavFile'

// Partials of a 13 in head near 140 Hz with the air of an open shell; only their kind matters here.
const HEAD = [
  { frequencyHz: 141, amplitude: 0.12, gammaPerS: 35 }, { frequencyHz: 246, amplitude: 0.2, gammaPerS: 11 },
  { frequencyHz: 339, amplitude: 0.15, gammaPerS: 9 }, { frequencyHz: 371, amplitude: 0.06, gammaPerS: 22 },
  { frequencyHz: 428, amplitude: 0.08, gammaPerS: 10 }, { frequencyHz: 474, amplitude: 0.05, gammaPerS: 16 },
]

const tap = (plan: Partial<TapPlan> = {}) => tapSound({ partials: HEAD, noise: 1e-4, durationS: 2, ...plan })
const file = (samples: Float64Array, gain = 1) => wavFile([samples.map(x => Math.max(-1, Math.min(1, gain * x)))])

/** In place of matching, which judges lines by its own rules: what is asked here is whether they get that far. */
const explain: ExplainLines = () => ({ tension: { nPerM: 3000, u95NPerM: 30, repeatabilityU95NPerM: 3 }, fundamentalHz: 141, confidence: 1, doubtful: false, modes: [], unexplained: [], budget: [], runnerUp: null, warnings: [] })
const read = (wav: Uint8Array) => analyseRecording(requestFor(wav), explain)

function refusalOf(wav: Uint8Array) {
  const outcome = read(wav)
  if (outcome.kind === 'refused') expect(outcome.refusal.message).toMatch(/^[A-Z].*\.$/) // a sentence for a person
  return outcome.kind === 'refused' ? outcome.refusal.code : 'none'
}

/** A clap: half a dozen short bursts of noise within 20 ms, dying within a tenth of a second. */
function clap(): Float64Array {
  const normal = gaussian(9)
  const out = new Float64Array(96_000)
  for (const at of [0, 260, 500, 700, 830, 950]) for (let n = 0; n < 5000; n++) out[24_000 + at + n]! += 0.1 * normal() * Math.exp(-n / 400)
  return out
}

describe('recordings that hold no tap', () => {
  it('are refused as silent: digital silence, and a hiss 70 dB down', () => {
    expect(refusalOf(file(new Float64Array(96_000)))).toBe('silent')
    const normal = gaussian(1)
    expect(refusalOf(file(Float64Array.from({ length: 96_000 }, () => 1e-4 * normal())))).toBe('silent')
  })

  it('are refused as too short: 20 ms, and a tap whose ring is cut off', () => {
    expect(refusalOf(file(tap().subarray(19_200, 20_160)))).toBe('too-short')
    expect(refusalOf(file(tap().subarray(0, 19_200 + 4800)))).toBe('too-short')
  })

  it.each([
    ['mains hum', () => soxFile(['-r', '48000', '-b', '16'], ['synth', '3', 'sine', '50', 'gain', '-12'])],
    ['white noise', () => soxFile(['-r', '48000', '-b', '16', '-R'], ['synth', '3', 'whitenoise', 'gain', '-12'])],
    ['a tone that swells and fades', () => soxFile(['-r', '48000', '-b', '16'], ['synth', '3', 'sine', '440', 'fade', 't', '0.8', '3', '0.8'])],
  ])('are refused without a tap: %s', (_, wav) => {
    expect(refusalOf(wav())).toBe('no-tap')
  })

  it.each(['en-us', 'en-gb+f3', 'de', 'fr+m4', 'es', 'it+f2'])('are refused as not a drum: speech (%s)', (voice) => {
    expect(refusalOf(speech('One two three, testing. Please tap the top head, then put the big drum back.', voice))).toMatch(/not-a-drum|no-tap/)
  })

  it('are refused as not a drum: a clap', () => {
    expect(refusalOf(file(clap()))).toBe('not-a-drum')
  })

  it('are refused as not a drum: notes that are held', () => {
    const notes = soxFile(['-r', '48000', '-b', '16'], ['synth', '0.7', 'sine', '220', 'synth', '0.7', 'sine', 'mix', '441', 'fade', 'q', '0.005', '0.7', '0.05', 'gain', '-8', 'pad', '0.3', '0.3', 'repeat', '2'])
    expect(refusalOf(notes)).toBe('not-a-drum')
  })
})

describe('clipping', () => {
  it('of the ring is refused', () => {
    expect(refusalOf(file(tap(), 6))).toBe('clipped')
  })

  it('is seen below full scale too, where a gain came after it', () => {
    expect(refusalOf(file(tap().map(x => 0.5 * Math.max(-1, Math.min(1, 6 * x)))))).toBe('clipped')
  })

  it('of a moment at the contact passes with a warning', () => {
    const samples = tap()
    // A click of the stick: 4 ms at 5 kHz, far louder than the ring.
    for (let n = 0; n < 192; n++) samples[19_200 + n]! += 2 * Math.sin(2 * Math.PI * 5000 * n / 48_000) * Math.exp(-n / 60)
    const outcome = read(file(samples))
    expect(outcome.kind === 'read' && outcome.reading.warnings.map(w => w.code)).toContain('slightly-clipped')
  })

  it('is not seen in a tap whose peak was brought to full scale', () => {
    const samples = tap()
    const peak = samples.reduce((max, x) => Math.max(max, Math.abs(x)), 0)
    const outcome = read(file(samples, 1 / peak))
    expect(outcome.kind === 'read' && outcome.reading.warnings.map(w => w.code)).not.toContain('slightly-clipped')
  })
})

describe('real taps', () => {
  const power = HEAD.reduce((sum, p) => sum + p.amplitude ** 2 / 2, 0)
  it.each([15, 20, 30])('are not refused at %i dB over the noise in a room with a tail', (snrDb) => {
    for (let seed = 1; seed <= 10; seed++) {
      // Ratio of the ring's first moments to the noise; the room's tail carries 4 % of the energy.
      const noise = Math.sqrt(power * 10 ** (-snrDb / 10))
      expect(refusalOf(file(tap({ seed, noise, room: { level: 0.2, t60S: 0.5 } }), 0.8))).toBe('none')
    }
  })

  it('are not refused with hum under them', () => {
    const samples = tap().map((x, n) => x + 0.02 * Math.sin(2 * Math.PI * 50 * n / 48_000) + 0.01 * Math.sin(2 * Math.PI * 150 * n / 48_000))
    expect(refusalOf(file(samples))).toBe('none')
  })
})
