/**
 * Real toms whose tension nobody knows: the General MIDI set of fluid-soundfont-gm and the soft and hard strokes of
 * sonic-pi-samples (CC0). Their size is a guess, so what is asked is that a reading is never confidently wrong: the
 * lowest strong line of a tom struck at its centre is its lowest (0,1), measured outside this project near its rest, and a reading that puts the fundamental elsewhere must be marked doubtful or be refused.
 */
import { beforeAll, describe, expect, it } from 'vitest'
import { analyseRecording } from '../../../server/utils/analysis/analyse'
import type { AnalysedHead, AnalysedInstrument, AnalysisOutcome } from '../../../server/utils/analysis/types'
import { renderNote, requirePackages, sonicPiSample } from './soundfont'

const DRUM_CHANNEL = 9
const INCH = 0.0254

function head(side: 'batter' | 'resonant', plies: number): AnalysedHead {
  return { side, material: 'pet', plies, plyThicknessM: plies === 2 ? 178e-6 : 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: plies === 2 ? 0.495 : 0.3475 }
}

function tom(diameterIn: number, depthIn: number): AnalysedInstrument {
  return { construction: 'double-headed', radiusM: diameterIn * INCH / 2, depthM: depthIn * INCH, rodCount: diameterIn > 14 ? 8 : 6, heads: [head('batter', 2), head('resonant', 1)] }
}

function read(wav: Uint8Array, instrument: AnalysedInstrument): AnalysisOutcome {
  return analyseRecording({ wav, instrument, side: 'batter', strike: 'centre', firstRod: 1, centreDamped: false, temperatureC: 20 })
}

const kept = new Map<string, AnalysisOutcome>()

function readOnce(name: string, wav: () => Uint8Array, instrument: AnalysedInstrument): AnalysisOutcome {
  const found = kept.get(name) ?? read(wav(), instrument)
  kept.set(name, found)
  return found
}

/**
 * The lowest strong line near rest, Hz: slope of the phase of the band-passed analytic signal (scipy butter and hilbert)
 * over 30 ms, where the line has sunk by 20 to 30 dB. All of these strokes glide: the same line stands 15 to 25 % higher
 * 20 ms after the strike, and the General MIDI ones may still fall by another per cent.
 */
const TOMS = [
  { name: 'General MIDI note 41', wav: () => renderNote(DRUM_CHANNEL, 0, 41), lowestHz: 48.0, size: [18, 16] },
  { name: 'General MIDI note 43', wav: () => renderNote(DRUM_CHANNEL, 0, 43), lowestHz: 72.2, size: [16, 16] },
  { name: 'General MIDI note 45', wav: () => renderNote(DRUM_CHANNEL, 0, 45), lowestHz: 72.4, size: [14, 12] },
  { name: 'General MIDI note 47', wav: () => renderNote(DRUM_CHANNEL, 0, 47), lowestHz: 91.0, size: [13, 10] },
  { name: 'General MIDI note 48', wav: () => renderNote(DRUM_CHANNEL, 0, 48), lowestHz: 96.8, size: [12, 9] },
  { name: 'General MIDI note 50', wav: () => renderNote(DRUM_CHANNEL, 0, 50), lowestHz: 107.5, size: [10, 8] },
  { name: 'low tom, soft', wav: () => sonicPiSample('drum_tom_lo_soft'), lowestHz: 90.6, size: [14, 12] },
  { name: 'low tom, hard', wav: () => sonicPiSample('drum_tom_lo_hard'), lowestHz: 90.3, size: [14, 12] },
  { name: 'middle tom, soft', wav: () => sonicPiSample('drum_tom_mid_soft'), lowestHz: 120.1, size: [12, 9] },
  { name: 'middle tom, hard', wav: () => sonicPiSample('drum_tom_mid_hard'), lowestHz: 120.6, size: [12, 9] },
  { name: 'high tom, soft', wav: () => sonicPiSample('drum_tom_hi_soft'), lowestHz: 151.4, size: [10, 8] },
  { name: 'high tom, hard', wav: () => sonicPiSample('drum_tom_hi_hard'), lowestHz: 151.3, size: [10, 8] },
] as const

describe('a real tom', () => {
  beforeAll(requirePackages)

  for (const { name, wav, lowestHz, size } of TOMS) {
    it(`(${name}) is read with its lowest line as (0,1), or its reading is marked doubtful`, () => {
      const outcome = readOnce(name, wav, tom(size[0], size[1]))
      if (outcome.kind === 'refused') {
        expect(['too-short', 'not-a-drum', 'no-tap', 'clipped']).toContain(outcome.refusal.code)
        return
      }
      const { reading } = outcome
      const off = Math.abs(1200 * Math.log2(reading.fundamentalHz / lowestHz))
      // 60 cents: what is left of a glide of 250 cents and more; the outside values hold some of it themselves.
      expect(off < 60 || reading.doubtful, `fundamental ${reading.fundamentalHz.toFixed(1)} Hz for ${lowestHz} Hz, confidence ${reading.confidence}`).toBe(true)
    })
  }

  it('tells of the glide of all twelve strokes: none of them was soft', () => {
    for (const { name, wav, size } of TOMS) {
      const outcome = readOnce(name, wav, tom(size[0], size[1]))
      if (outcome.kind === 'refused') continue
      expect(outcome.reading.warnings.map(w => w.code), name).toContain('pitch-glide')
      expect(outcome.reading.glide?.share, name).toBeGreaterThan(0.04) // the phase of the analytic signal falls by 13 to 25 % from 20 ms on
      expect(outcome.reading.glide?.share, name).toBeLessThan(0.27) // the largest of these, and a tenth
    }
  })

  for (const size of ['lo', 'mid', 'hi'] as const) {
    it(`(${size}) has the same pitch at rest after a soft and a hard stroke, where both readings are sure`, () => {
      const instrument = { lo: tom(14, 12), mid: tom(12, 9), hi: tom(10, 8) }[size]
      const [soft, hard] = (['soft', 'hard'] as const).map(stroke => readOnce(`${{ lo: 'low', mid: 'middle', hi: 'high' }[size]} tom, ${stroke}`, () => sonicPiSample(`drum_tom_${size}_${stroke}`), instrument)) as [AnalysisOutcome, AnalysisOutcome]
      if (soft.kind === 'refused' || hard.kind === 'refused') throw new Error('a clear stroke was refused')
      const ratio = hard.reading.fundamentalHz / soft.reading.fundamentalHz
      const sure = !soft.reading.doubtful && !hard.reading.doubtful
      // 1.5 %: the two recordings were not made on one day with one tuning for all that is known; late in the ring they differ by 0.3 to 1.3 %.
      expect(!sure || Math.abs(ratio - 1) < 0.015, `hard/soft ${ratio.toFixed(4)}`).toBe(true)
    })
  }
})
