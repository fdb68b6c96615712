/**
 * Real toms whose tension nobody knows: the General MIDI set of fluid-soundfont-gm and the soft and hard strokes of
 * sonic-pi-samples (CC0). Their size is a guess, so what is asked is that a reading is never confidently wrong: the
 * lowest strong line of a tom struck at its centre is its lowest (0,1), measured outside this project with an
 * interpolated FFT, and a reading that puts the fundamental elsewhere must be marked doubtful or be refused.
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

/** The lowest strong line late in the ring, Hz, by numpy's FFT of 0.6 s (General MIDI) or 0.3 s (sonic-pi) under a Hann window. */
const TOMS = [
  { name: 'General MIDI note 41', wav: () => renderNote(DRUM_CHANNEL, 0, 41), lowestHz: 52.0, size: [18, 16] },
  { name: 'General MIDI note 43', wav: () => renderNote(DRUM_CHANNEL, 0, 43), lowestHz: 75.8, size: [16, 16] },
  { name: 'General MIDI note 45', wav: () => renderNote(DRUM_CHANNEL, 0, 45), lowestHz: 77.3, size: [14, 12] },
  { name: 'General MIDI note 47', wav: () => renderNote(DRUM_CHANNEL, 0, 47), lowestHz: 95.9, size: [13, 10] },
  { name: 'General MIDI note 48', wav: () => renderNote(DRUM_CHANNEL, 0, 48), lowestHz: 101.8, size: [12, 9] },
  { name: 'General MIDI note 50', wav: () => renderNote(DRUM_CHANNEL, 0, 50), lowestHz: 112.8, size: [10, 8] },
  { name: 'low tom, soft', wav: () => sonicPiSample('drum_tom_lo_soft'), lowestHz: 93.2, size: [14, 12] },
  { name: 'low tom, hard', wav: () => sonicPiSample('drum_tom_lo_hard'), lowestHz: 94.4, size: [14, 12] },
  { name: 'middle tom, soft', wav: () => sonicPiSample('drum_tom_mid_soft'), lowestHz: 122.8, size: [12, 9] },
  { name: 'middle tom, hard', wav: () => sonicPiSample('drum_tom_mid_hard'), lowestHz: 123.5, size: [12, 9] },
  { name: 'high tom, soft', wav: () => sonicPiSample('drum_tom_hi_soft'), lowestHz: 153.9, size: [10, 8] },
  { name: 'high tom, hard', wav: () => sonicPiSample('drum_tom_hi_hard'), lowestHz: 154.3, size: [10, 8] },
] as const

describe('a real tom', () => {
  beforeAll(requirePackages)

  for (const { name, wav, lowestHz, size } of TOMS) {
    it(`(${name}) is read with its lowest line as (0,1), or its reading is marked doubtful`, () => {
      const outcome = read(wav(), tom(size[0], size[1]))
      if (outcome.kind === 'refused') {
        expect(['too-short', 'not-a-drum', 'no-tap', 'clipped']).toContain(outcome.refusal.code)
        return
      }
      const { reading } = outcome
      const off = Math.abs(1200 * Math.log2(reading.fundamentalHz / lowestHz))
      // 60 cents: a hard stroke still glides inside the window that the outside value was taken from.
      expect(off < 60 || reading.doubtful, `fundamental ${reading.fundamentalHz.toFixed(1)} Hz for ${lowestHz} Hz, confidence ${reading.confidence}`).toBe(true)
    })
  }

  for (const size of ['lo', 'mid', 'hi'] as const) {
    it(`(${size}) has the same pitch at rest after a soft and a hard stroke, where both readings are sure`, () => {
      const instrument = { lo: tom(14, 12), mid: tom(12, 9), hi: tom(10, 8) }[size]
      const [soft, hard] = [read(sonicPiSample(`drum_tom_${size}_soft`), instrument), read(sonicPiSample(`drum_tom_${size}_hard`), instrument)]
      if (soft.kind === 'refused' || hard.kind === 'refused') throw new Error('a clear stroke was refused')
      const ratio = hard.reading.fundamentalHz / soft.reading.fundamentalHz
      const sure = !soft.reading.doubtful && !hard.reading.doubtful
      // 1.5 %: the two recordings were not made on one day with one tuning for all that is known; late in the ring they differ by 0.3 to 1.3 %.
      expect(!sure || Math.abs(ratio - 1) < 0.015, `hard/soft ${ratio.toFixed(4)}`).toBe(true)
    })
  }
})
