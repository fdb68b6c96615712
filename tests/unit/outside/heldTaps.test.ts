/**
 * Forty taps that must be read: five drums, each heard in eight ways that a workshop or a telephone gives. The drums are
 * the independent simulation of tests/support/drum; none of these cases was used when the refusals were decided.
 */
import { describe, expect, it } from 'vitest'
import { judge, requestFor } from '../accuracy/readTap'
import { seededRandom, simulateTap, writeWav16 } from '../../support/drum'
import { finishRecording } from '../../support/drum/simulateTap'
import { CONSTRUCTIONS, drawCase, type SimCase } from '../../support/drum/cases'
import { soxConverted } from '../analysis/support/outsideTools'
import { wavFile } from '../analysis/support/wavFile'

/** The drum of a construction in a quiet room, soft tap: what each way of hearing starts from. */
function plainCase(construction: SimCase['construction'], seed: number): SimCase {
  const drawn = drawCase(construction, seed, { place: construction === 'kettle' ? 'edge' : 'half-way', snrDb: 40 })
  return { ...drawn, tap: { ...drawn.tap, recording: { ...drawn.tap.recording, sampleRateHz: 48_000, hum: undefined, room: undefined, peakDbfs: -6 } } }
}

const WAYS: Record<string, (found: SimCase) => Uint8Array> = {
  'quiet: its peak at -45 dB of full scale, 24 bit': ({ tap }) => wavFile([simulateTap({ ...tap, recording: { ...tap.recording, peakDbfs: -45 } }).samples], { kind: 's24' }),
  'noisy: 10 dB over white noise': ({ tap }) => wav(simulateTap({ ...tap, recording: { ...tap.recording, snrDb: 10 } }).samples),
  'in a room with a tail and mains hum': ({ tap }) => wav(simulateTap({ ...tap, recording: { ...tap.recording, snrDb: 25, hum: { hz: 50, snrDb: 22 }, room: { levelDb: -18, t60S: 0.5 } } }).samples),
  'through an 8 kHz telephone': ({ tap }) => soxConverted(wav(simulateTap(tap).samples), ['-r', '8000', '-b', '16'], ['highpass', '80']),
  'slightly clipped: 1 dB over the rails': ({ tap }) => wav(simulateTap(tap).samples.map(x => Math.max(-0.446, Math.min(0.446, x)))),
  'with an offset of a fifth of full scale': ({ tap }) => wav(simulateTap(tap).samples.map(x => 0.2 + 0.8 * x)),
  'cut so that the tap is at the first sample': ({ tap }) => {
    const { samples, truth } = simulateTap(tap)
    return wav(samples.subarray(Math.round(truth.onsetS * 48_000)))
  },
  'with a second tap 0.35 s later': ({ tap }) => {
    const { samples, truth } = simulateTap(tap)
    const onset = Math.round(truth.onsetS * 48_000)
    const twice = samples.slice()
    for (let n = onset; n + 16_800 < twice.length; n++) twice[n + 16_800]! += 0.7 * samples[n]!
    return wav(finishRecording(twice, onset, { seed: 5, snrDb: 40 }))
  },
}

const wav = (samples: Float64Array) => writeWav16(samples, 48_000)

describe('a tap that must be read', () => {
  const seeds = seededRandom(2026)
  for (const construction of CONSTRUCTIONS) {
    const found = plainCase(construction, 5000 + Math.floor(seeds.uniform(0, 1000)))
    for (const [way, record] of Object.entries(WAYS)) {
      it(`is: ${found.name.replace(/ \d+ dB.*/, '')}, ${way}`, async () => {
        const { truth } = simulateTap(found.tap)
        const judged = await judge({ ...requestFor({ samples: new Float64Array(1), sampleRateHz: 48_000, truth }, found.tap, found.place, found.rodCount, found.film), wav: record(found) }, truth)
        expect(judged.outcome.kind, JSON.stringify(judged.outcome.kind === 'refused' && judged.outcome.refusal)).toBe('read')
        // 5 %: far outside every stated uncertainty of these readings, so a larger error without a mark is a wrong reading.
        expect(Math.abs(judged.tensionError!) < 0.05 || judged.reading!.doubtful, `tension off by ${(100 * judged.tensionError!).toFixed(1)} %, confidence ${judged.reading!.confidence}`).toBe(true)
      })
    }
  }
})
