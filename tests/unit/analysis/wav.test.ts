import { describe, expect, it } from 'vitest'
import { RefusalError } from '../../../server/utils/analysis/refusal'
import { readWav, samplesOf } from '../../../server/utils/analysis/wav'
import { soxFile, soxStream } from './support/outsideTools'
import { uniform } from './support/synth'
import { wavFile, type SampleKind } from './support/wavFile'

const next = uniform(3)
const LEFT = Float64Array.from({ length: 4801 }, () => 1.6 * next() - 0.8)
const RIGHT = LEFT.map(x => -x / 2)
// Half a step of each format: the most that rounding to it may move a sample; floats are held in single precision.
const HALF_STEP: Record<SampleKind, number> = { u8: 2 ** -8, s16: 2 ** -16, s24: 2 ** -24 + 2 ** -25, s32: 2 ** -25, f32: 2 ** -25, f64: 2 ** -25 }
const KINDS = Object.keys(HALF_STEP) as SampleKind[]

function largestDifference(a: ArrayLike<number>, b: ArrayLike<number>) {
  let most = Math.abs(a.length - b.length)
  for (let i = 0; i < a.length; i++) most = Math.max(most, Math.abs(a[i]! - b[i]!))
  return most
}

function refusalOf(work: () => unknown): { code: string, message: string } {
  try {
    work()
  } catch (error) {
    if (error instanceof RefusalError) return error.toRefusal()
    throw error
  }
  return { code: 'none', message: '' }
}

describe('reading WAV files', () => {
  it.each(KINDS.flatMap(kind => [false, true].map(extensible => ({ kind, extensible }))))('reads $kind mono, extensible header $extensible, to within half a step', ({ kind, extensible }) => {
    const sound = readWav(wavFile([LEFT], { kind, extensible }))
    expect(sound.channels).toHaveLength(1)
    expect(largestDifference(samplesOf(sound.channels[0]!), LEFT)).toBeLessThanOrEqual(HALF_STEP[kind]) // rounding to the format, see HALF_STEP
    expect(sound.sampleRateHz).toBe(48_000)
    expect(sound.durationS).toBeCloseTo(4801 / 48_000, 12) // exact division
  })

  it.each(KINDS)('keeps the two channels of a %s stereo file apart', (kind) => {
    const sound = readWav(wavFile([LEFT, RIGHT], { kind }))
    expect(largestDifference(samplesOf(sound.channels[0]!), LEFT)).toBeLessThanOrEqual(HALF_STEP[kind]) // rounding to the format
    expect(largestDifference(samplesOf(sound.channels[1]!), RIGHT)).toBeLessThanOrEqual(HALF_STEP[kind]) // rounding to the format
  })

  // sox is the outside encoder, and its headerless file of doubles the truth.
  it.each([
    ['8 bit', ['-b', '8', '-e', 'unsigned-integer'], 2 ** -7],
    ['16 bit', ['-b', '16'], 2 ** -15],
    ['24 bit (extensible)', ['-b', '24'], 2 ** -23],
    ['32 bit (extensible)', ['-b', '32'], 2 ** -23],
    ['32 bit float', ['-b', '32', '-e', 'floating-point'], 2 ** -23],
    ['64 bit float', ['-b', '64', '-e', 'floating-point'], 2 ** -23],
  ] as [string, string[], number][])('reads what sox writes as %s', (_, format, step) => {
    const effects = ['synth', '0.5', 'sine', '1000', 'gain', '-6']
    const raw = soxFile(['-r', '44100', '-c', '1'], effects, 'out.f64').slice()
    const truth = new Float64Array(raw.buffer, 0, raw.length / 8)
    for (const channels of [1, 2]) {
      const sound = readWav(soxFile(['-r', '44100', '-c', String(channels), ...format], effects))
      expect(sound.channels).toHaveLength(channels)
      expect(sound.channels[0]!.length).toBe(22050)
      expect(largestDifference(samplesOf(sound.channels[0]!), truth)).toBeLessThanOrEqual(0.51 * step) // half a step of the format (of single precision for the last three)
    }
  })

  it.each([8000, 11025, 96_000, 192_000])('reads a sox file at %i samples a second', (rate) => {
    const sound = readWav(soxFile(['-r', String(rate), '-b', '16'], ['synth', '0.25', 'sine', '500']))
    expect(sound.sampleRateHz).toBe(rate)
    expect(sound.channels[0]!.length).toBe(Math.round(rate / 4))
  })

  it('reads to the end of a streamed file, whose length field cannot be known', () => {
    const streamed = soxStream(['-r', '48000', '-b', '16', '-c', '1'], ['synth', '0.5', 'sine', '300'])
    expect(readWav(streamed).channels[0]!.length).toBe(24_000)
    for (const dataBytes of [0, 0xFFFFFFFF, 0x7FFFF000]) expect(readWav(wavFile([LEFT], { claims: { dataBytes } })).channels[0]!.length).toBe(LEFT.length)
  })

  it('accepts a missing pad byte and drops a last block that is cut', () => {
    const odd = wavFile([LEFT], { kind: 'u8' })
    expect(readWav(odd.subarray(0, odd.length - 1)).channels[0]!.length).toBe(LEFT.length)
    const cut = wavFile([LEFT, RIGHT])
    expect(readWav(cut.subarray(0, cut.length - 3)).channels[0]!.length).toBe(LEFT.length - 1)
  })

  it('walks over other chunks before the sound, of odd length too', () => {
    const sound = readWav(wavFile([LEFT], { extraChunks: [{ name: 'LIST', bytes: new Uint8Array(27) }, { name: 'bext', bytes: new Uint8Array(602) }] }))
    expect(sound.channels[0]!.length).toBe(LEFT.length)
  })
})

describe('refusing what cannot be trusted', () => {
  const png = Uint8Array.from([0x89, 0x50, 0x4E, 0x47, 0x0D, 0x0A, 0x1A, 0x0A, ...new Array(200).fill(7)])
  const whole = wavFile([LEFT])
  it.each([
    ['a PNG with another name', png, 'not-wav'],
    ['an empty file', new Uint8Array(0), 'not-wav'],
    ['a header that is cut', whole.subarray(0, 30), 'not-wav'],
    ['a file cut in the middle of its sound', whole.subarray(0, 4000), 'not-wav'],
    ['a header that promises ten times the sound', wavFile([LEFT], { claims: { dataBytes: 96_020 } }), 'not-wav'],
    ['no channels', wavFile([LEFT], { claims: { channels: 0 } }), 'not-wav'],
    ['65535 channels', wavFile([LEFT], { claims: { channels: 65535 } }), 'not-wav'],
    ['a rate of 0', wavFile([LEFT], { claims: { sampleRateHz: 0 } }), 'not-wav'],
    ['a rate of four thousand million', wavFile([LEFT], { claims: { sampleRateHz: 4_000_000_000 } }), 'not-wav'],
    ['a rate of 4000', wavFile([LEFT], { claims: { sampleRateHz: 4000 } }), 'low-rate'],
    ['13 bits', wavFile([LEFT], { claims: { bits: 13 } }), 'not-wav'],
    ['65535 bits', wavFile([LEFT], { claims: { bits: 65535 } }), 'not-wav'],
    ['a block size that contradicts the format', wavFile([LEFT], { claims: { blockBytes: 3 } }), 'not-wav'],
    ['ADPCM', wavFile([LEFT], { claims: { code: 2 } }), 'not-wav'],
    ['MP3 in a WAV', wavFile([LEFT], { claims: { code: 0x55 } }), 'not-wav'],
    ['a format chunk of no length', wavFile([LEFT], { claims: { fmtBytes: 0 } }), 'not-wav'],
    ['a format chunk beyond the file', wavFile([LEFT], { claims: { fmtBytes: 0xFFFFFFF0 } }), 'not-wav'],
    ['an extensible file of unknown kind', wavFile([LEFT], { extensible: true, claims: { code: 0x2000 } }), 'not-wav'],
    ['a float file that holds no numbers', wavFile([Float64Array.of(0, NaN, 0)], { kind: 'f32' }), 'not-wav'],
    ['no samples', wavFile([new Float64Array(0)]), 'too-short'],
    ['121 s', wavFile([new Float64Array(121 * 8000)], { sampleRateHz: 8000, kind: 'u8' }), 'too-large'],
    ['more than 50 MB', new Uint8Array(50 * 1024 * 1024 + 1), 'too-large'],
  ])('refuses %s', (_, bytes, code) => {
    const refusal = refusalOf(() => readWav(bytes))
    expect(refusal.code).toBe(code)
    expect(refusal.message).toMatch(/^[A-Z].*\.$/) // a sentence for a person
  })

  // Each of these holds a general reader for seconds to minutes; half a second leaves room for a slow machine.
  it.each([
    ['a sampler chunk with 268 million loops', wavFile([LEFT], { extraChunks: [{ name: 'smpl', bytes: bomb(36, 28, 0x0FFFFFFF) }] })],
    ['a cue chunk with a million points', wavFile([LEFT], { extraChunks: [{ name: 'cue ', bytes: bomb(12, 0, 1_000_000) }] })],
    ['20 MB of zeros behind a WAV header', zerosBehindHeader(20_000_000)],
    ['half a million empty chunks', wavFile([LEFT], { extraChunks: Array.from({ length: 500 }, () => ({ name: 'junk', bytes: new Uint8Array(8000) })) })],
  ])('answers within half a second on %s', (_, bytes) => {
    const start = performance.now()
    const refusal = refusalOf(() => readWav(bytes))
    expect(performance.now() - start).toBeLessThan(500) // see above
    expect(['none', 'not-wav']).toContain(refusal.code)
  })
})

function bomb(length: number, at: number, count: number): Uint8Array {
  const bytes = new Uint8Array(length)
  new DataView(bytes.buffer).setUint32(at, count, true)
  return bytes
}

function zerosBehindHeader(length: number): Uint8Array {
  const bytes = new Uint8Array(length)
  bytes.set(Uint8Array.from('RIFF____WAVE', c => c.charCodeAt(0)))
  return bytes
}
