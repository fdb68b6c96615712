import { describe, expect, it } from 'vitest'
import { TapGate } from '../../../app/utils/tapGate'
import { seededRandom } from '../../../app/utils/sand'

const RATE = 48_000
const BLOCK = 1024

/** Noise of a quiet room with decaying 200 Hz tones at the given moments. */
function room(durationS: number, taps: readonly number[], peak = 0.4): Float32Array {
  const random = seededRandom(11)
  const samples = new Float32Array(Math.round(durationS * RATE))
  for (let index = 0; index < samples.length; index++) {
    const t = index / RATE
    let value = 0.001 * (2 * random() - 1)
    for (const at of taps) if (t >= at) value += peak * Math.exp(-(t - at) * 9) * Math.sin(2 * Math.PI * 200 * (t - at))
    samples[index] = value
  }
  return samples
}

function listen(samples: Float32Array, taps: number): { gate: TapGate, endedAtS: number | null } {
  const gate = new TapGate({ sampleRateHz: RATE, taps })
  let endedAtS: number | null = null
  for (let at = 0; at + BLOCK <= samples.length && endedAtS === null; at += BLOCK) {
    gate.push(samples.slice(at, at + BLOCK))
    if (gate.state === 'complete') endedAtS = (at + BLOCK) / RATE
  }
  return { gate, endedAtS }
}

describe('the gate that records taps', () => {
  it('keeps nothing of a silent room', () => {
    const { gate, endedAtS } = listen(room(6, []), 1)
    expect(gate.state).toBe('listening')
    expect(endedAtS).toBeNull()
    // 0.4 s and less than two blocks: older sound is dropped while waiting.
    expect(gate.samples().length).toBeLessThan(0.4 * RATE + 2 * BLOCK)
  })

  it('keeps at least 0.3 s of quiet before the tap, which the analysis asks for', () => {
    const { gate } = listen(room(6, [2]), 1)
    const kept = gate.samples()
    const onset = kept.findIndex(value => Math.abs(value) > 0.02)
    expect(onset / RATE).toBeGreaterThan(0.3)
    expect(onset / RATE).toBeLessThan(0.5) // 0.4 s and one block of 21 ms, with room for a second
  })

  it('ends by itself when the tap has rung out', () => {
    const { gate, endedAtS } = listen(room(8, [1]), 1)
    expect(gate.taps).toBe(1)
    // The shortest ring of 1.5 s and the longest of 5 s after the tap bound the end.
    expect(endedAtS).toBeGreaterThan(2.5)
    expect(endedAtS).toBeLessThan(6.1)
  })

  it('waits for every tap of a round and counts each once', () => {
    const moments = [1, 2.2, 3.4, 4.6, 5.8, 7]
    const { gate, endedAtS } = listen(room(14, moments), moments.length)
    expect(gate.taps).toBe(moments.length)
    expect(endedAtS).toBeGreaterThan(8.4) // the last tap and its shortest ring
  })

  it('says when the microphone was overdriven', () => {
    expect(listen(room(5, [1], 1.2), 1).gate.clipped).toBe(true)
    expect(listen(room(5, [1], 0.4), 1).gate.clipped).toBe(false)
  })
})
