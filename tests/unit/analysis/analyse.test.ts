import { describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import { combineFindings } from '../../../server/utils/analysis/combine'
import type { ExplainLines } from '../../../server/utils/analysis/explanation'
import type { LineFindings } from '../../../server/utils/analysis/lines'
import type { AnalysisRequest } from '../../../server/utils/analysis/types'
import { requestFor } from './support/request'
import { tapSound, type TapPlan } from './support/synth'
import { wavFile } from './support/wavFile'

const HEAD = [
  { frequencyHz: 141, amplitude: 0.05, gammaPerS: 30 }, { frequencyHz: 246, amplitude: 0.2, gammaPerS: 11 },
  { frequencyHz: 339, amplitude: 0.1, gammaPerS: 9 }, { frequencyHz: 428, amplitude: 0.05, gammaPerS: 10 },
]
const tap = (plan: Partial<TapPlan> = {}) => tapSound({ partials: HEAD, noise: 1e-3, durationS: 2, ...plan })

/** In place of matching: hands out the lines it was given. */
function listener() {
  const given: LineFindings[] = []
  const explain: ExplainLines = (findings) => {
    given.push(findings)
    return {
      tension: { nPerM: 3000, u95NPerM: 30, repeatabilityU95NPerM: 3 }, fundamentalHz: 141, confidence: 1, doubtful: false,
      modes: [{ m: 1, n: 1, measuredHz: 428, u95Hz: 0.1, predictedHz: 428, levelDb: 0, t60S: 0.6 }],
      unexplained: [], budget: [], runnerUp: null, warnings: [],
    }
  }
  return { given, explain }
}

function readingOf(wav: Uint8Array, changes: Partial<AnalysisRequest> = {}) {
  const { given, explain } = listener()
  const outcome = analyseRecording(requestFor(wav, changes), explain)
  if (outcome.kind !== 'read') throw new Error(`refused: ${outcome.refusal.message}`)
  return { ...outcome, findings: given[0]! }
}

describe('what an outcome says of the sound', () => {
  const { sound, timingsMs } = readingOf(wavFile([tap()], { kind: 's24' }))

  it('gives its facts', () => {
    expect(sound).toMatchObject({ durationS: 2, sampleRateHz: 48_000, channels: 1, bitDepth: '24 bit' })
    const peak = tap().reduce((max, x) => Math.max(max, Math.abs(x)), 0)
    expect(sound.peakDbfs).toBeCloseTo(20 * Math.log10(peak), 1) // given to a tenth of a dB
  })

  it('draws the waveform in 1200 columns, quiet before the tap and loud after it', () => {
    const { columns, minMax } = sound.waveform
    expect(columns).toBe(1200)
    expect(minMax).toHaveLength(2400)
    const swing = (column: number) => minMax[2 * column + 1]! - minMax[2 * column]!
    expect(swing(230)).toBeLessThan(0.02) // 0.38 s: noise of 0.001 rms
    expect(swing(245)).toBeGreaterThan(0.3) // 0.41 s: the ring
  })

  it('draws the spectrum with its strongest point at 0 dB on the loudest line, up to a little above the highest mode', () => {
    const { fromHz, stepHz, levelDb } = sound.spectrum!
    expect(levelDb).toHaveLength(900)
    expect(Math.max(...levelDb)).toBe(0)
    expect(Math.abs(fromHz + stepHz * levelDb.indexOf(0) - 246)).toBeLessThan(1.5) // two steps of half a Hz and more
    expect(fromHz + stepHz * 899).toBeCloseTo(1.15 * 428, 0) // a seventh above the highest mode
  })

  it('says how long each step took', () => {
    expect(Object.keys(timingsMs)).toEqual(expect.arrayContaining(['decode', 'taps', 'lines', 'matching', 'spectrum']))
  })

  it('stays small enough to store with every reading', () => {
    expect(JSON.stringify(sound).length).toBeLessThan(30_000) // bytes
  })

  it('is there for a refused recording, but not for an unreadable file', () => {
    const { explain } = listener()
    const silent = analyseRecording(requestFor(wavFile([new Float64Array(96_000)])), explain)
    expect(silent).toMatchObject({ kind: 'refused', refusal: { code: 'silent' }, sound: { durationS: 2, spectrum: null } })
    const text = analyseRecording(requestFor(Uint8Array.from('not a sound', c => c.charCodeAt(0))), explain)
    expect(text).toMatchObject({ kind: 'refused', refusal: { code: 'not-wav' }, sound: null })
  })
})

describe('the taps of a recording', () => {
  it('carry the rod that was named for an edge tap, and none at the centre', () => {
    const wav = wavFile([tap()])
    expect(readingOf(wav, { strike: 'edge', rod: 5 }).reading.taps).toEqual([{ atS: expect.closeTo(0.4, 2), rod: 5 }]) // contact length
    expect(readingOf(wav, { strike: 'edge' }).reading.taps[0]!.rod).toBeNull()
    expect(readingOf(wav, { strike: 'centre' }).reading.taps[0]!.rod).toBeNull()
  })

  it('of a round go clockwise from the first rod, and the rim is said not to be read', () => {
    const tapsAtS = Array.from({ length: 8 }, (_, i) => 0.3 + 1.2 * i)
    const { reading, findings } = readingOf(wavFile([tap({ tapsAtS, durationS: 10 })]), { strike: 'round', firstRod: 3 })
    expect(reading.taps.map(t => t.rod)).toEqual([3, 4, 5, 6, 7, 8, 1, 2])
    expect(reading.rim).toBeNull()
    expect(reading.warnings.map(w => w.code)).toContain('rim-not-read')
    expect(reading.warnings.map(w => w.code)).not.toContain('round-count')
    expect(findings.lines.filter(l => l.levelDb > -20)).toHaveLength(4)
  })

  it('of a round with one too few are counted out loud', () => {
    const tapsAtS = Array.from({ length: 7 }, (_, i) => 0.3 + 1.2 * i)
    expect(readingOf(wavFile([tap({ tapsAtS, durationS: 9 })]), { strike: 'round' }).reading.warnings.map(w => w.code)).toContain('round-count')
  })

  it('are read together: three taps give smaller errors than one', () => {
    const errors = (tapsAtS: number[], durationS: number) => {
      const all: number[] = []
      for (let seed = 1; seed <= 6; seed++) {
        const { findings } = readingOf(wavFile([tap({ noise: 0.01, tapsAtS, durationS, seed })]))
        for (const { frequencyHz } of HEAD.slice(1)) all.push(Math.min(...findings.lines.map(l => Math.abs(l.frequencyHz - frequencyHz))))
      }
      return Math.sqrt(all.reduce((sum, e) => sum + e * e, 0) / all.length)
    }
    expect(errors([0.3, 1.8, 3.3], 5)).toBeLessThan(0.85 * errors([0.3], 2)) // 1/sqrt(3) = 0.58; the rms of 18 errors scatters by a sixth
  })
})

describe('channels', () => {
  const mono = tap()
  const frequencies = (wav: Uint8Array) => readingOf(wav).findings.lines.filter(l => l.levelDb > -20).map(l => Math.round(l.frequencyHz))

  it('that agree are added, and an empty or much weaker one is left out', () => {
    const expected = HEAD.map(p => p.frequencyHz)
    expect(frequencies(wavFile([mono, mono]))).toEqual(expected)
    expect(frequencies(wavFile([new Float64Array(mono.length), mono]))).toEqual(expected)
    expect(frequencies(wavFile([mono, mono.map(x => -0.5 * x)]))).toEqual(expected)
  })

  it('that clip give way to one that does not', () => {
    const clipped = mono.map(x => Math.max(-1, Math.min(1, 8 * x)))
    expect(frequencies(wavFile([clipped, mono]))).toEqual(HEAD.map(p => p.frequencyHz))
  })

  it('with a constant offset read like those without', () => {
    expect(frequencies(wavFile([mono.map(x => x + 0.2)]))).toEqual(HEAD.map(p => p.frequencyHz))
  })
})

describe('lines of several taps', () => {
  const line = (frequencyHz: number, standardErrorHz: number, levelDb = 0) => ({ frequencyHz, standardErrorHz, amplitude: 0.1, levelDb, gammaPerS: 9, phaseRad: 0, steady: false })
  const findings = (...lines: ReturnType<typeof line>[]): LineFindings => ({ lines, fromHz: 20, toHz: 4000, detection: { stepHz: 40, levelDb: [] }, explainedShare: 1 })

  it('are averaged with weights 1 / variance', () => {
    const [mean] = combineFindings([findings(line(200, 0.1)), findings(line(200.1, 0.2))]).lines
    expect(mean!.frequencyHz).toBeCloseTo(200.02, 6) // (100 * 200 + 25 * 200.1) / 125
    expect(mean!.standardErrorHz).toBeCloseTo(1 / Math.sqrt(125), 6) // arithmetic
  })

  it('that disagree get the larger error of the Birge ratio', () => {
    const [mean] = combineFindings([findings(line(200, 0.01)), findings(line(200.4, 0.01))]).lines
    expect(mean!.standardErrorHz).toBeCloseTo(0.2, 6) // half the distance: Birge, Phys. Rev. 40 (1932) 207
  })

  it('stay apart within one tap, and a weak one that only one tap heard is left out', () => {
    const { lines } = combineFindings([findings(line(200, 0.01), line(200.4, 0.01, -3), line(333, 0.1, -40)), findings(line(200, 0.01), line(200.4, 0.01, -3))])
    expect(lines.map(l => Math.round(10 * l.frequencyHz) / 10)).toEqual([200, 200.4])
  })
})
