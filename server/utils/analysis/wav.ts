import * as wavefile from 'wavefile'
import { RefusalError } from './refusal'
import { findSound, type RiffSound } from './riff'

export interface DecodedSound {
  sampleRateHz: number
  /** One array a channel, full scale = 1; float files may go beyond. */
  channels: Float32Array[]
  /** As a person would say it: '16 bit', '32 bit float'. */
  bitDepth: string
  durationS: number
}

interface ParsedWave { data: { samples: Uint8Array } }
type WaveFileClass = new (bytes: Uint8Array) => ParsedWave

// The package is CommonJS to Node and to the worker's bundler, a true module to Vite: take the class from where it is.
const loaded = wavefile as unknown as { WaveFile?: WaveFileClass, default?: { WaveFile?: WaveFileClass } }
const WaveFile = (loaded.WaveFile ?? loaded.default?.WaveFile) as WaveFileClass

/**
 * Reads a WAV file: PCM of 8, 16, 24 or 32 bit, float of 32 or 64 bit, plain or extensible header, one or two channels.
 *
 * wavefile sees only a two-chunk file rebuilt from checked figures (riff.ts says why); its sample bytes are then read through
 * a typed view, which takes milliseconds where its own getSamples takes up to half a second.
 * @throws RefusalError not-wav, too-large, low-rate, too-short
 */
export function readWav(bytes: Uint8Array): DecodedSound {
  const sound = findSound(bytes)
  const samples = new WaveFile(plainFile(bytes, sound)).data.samples
  const interleaved = normalise(samples, sound)
  for (let i = 0; i < interleaved.length; i++) {
    if (!Number.isFinite(interleaved[i]!)) throw new RefusalError('not-wav', 'The WAV file holds values that are not numbers. Save it as 16 or 24 bit and send it again.')
  }
  const frames = interleaved.length / sound.channels
  return {
    sampleRateHz: sound.sampleRateHz,
    channels: sound.channels === 1 ? [interleaved] : [everySecond(interleaved, 0), everySecond(interleaved, 1)],
    bitDepth: `${sound.bitsPerSample} bit${sound.float ? ' float' : ''}`,
    durationS: frames / sound.sampleRateHz,
  }
}

/** A file of just `fmt ` and `data`, the format code plain even where the original was extensible. */
function plainFile(bytes: Uint8Array, sound: RiffSound): Uint8Array {
  const out = new Uint8Array(44 + sound.dataBytes + (sound.dataBytes & 1))
  const view = new DataView(out.buffer)
  const blockBytes = sound.channels * sound.bitsPerSample / 8
  const write = (at: number, text: string) => out.set([...text].map(c => c.charCodeAt(0)), at)
  write(0, 'RIFF')
  view.setUint32(4, out.length - 8, true)
  write(8, 'WAVEfmt ')
  view.setUint32(16, 16, true)
  view.setUint16(20, sound.float ? 3 : 1, true)
  view.setUint16(22, sound.channels, true)
  view.setUint32(24, sound.sampleRateHz, true)
  view.setUint32(28, sound.sampleRateHz * blockBytes, true)
  view.setUint16(32, blockBytes, true)
  view.setUint16(34, sound.bitsPerSample, true)
  write(36, 'data')
  view.setUint32(40, sound.dataBytes, true)
  out.set(bytes.subarray(sound.dataStart, sound.dataStart + sound.dataBytes), 44)
  return out
}

/** Little-endian sample bytes to numbers with full scale 1: integers divide by 2^(bits - 1); 8 bit is offset binary. */
function normalise(samples: Uint8Array, sound: RiffSound): Float32Array {
  const step = sound.bitsPerSample / 8
  const count = Math.floor(Math.min(samples.byteLength, sound.dataBytes) / step)
  const aligned = samples.byteOffset % 8 === 0 ? samples : samples.slice()
  const { buffer, byteOffset } = aligned
  if (sound.float) return Float32Array.from(sound.bitsPerSample === 32 ? new Float32Array(buffer, byteOffset, count) : new Float64Array(buffer, byteOffset, count))
  const out = new Float32Array(count)
  if (step === 1) for (let i = 0; i < count; i++) out[i] = (aligned[i]! - 128) / 128
  else if (step === 2) scale(out, new Int16Array(buffer, byteOffset, count), 2 ** -15)
  else if (step === 4) scale(out, new Int32Array(buffer, byteOffset, count), 2 ** -31)
  else for (let i = 0, b = 0; i < count; i++, b += 3) out[i] = (aligned[b]! << 8 | aligned[b + 1]! << 16 | aligned[b + 2]! << 24) * 2 ** -31
  return out
}

function scale(out: Float32Array, from: Int16Array | Int32Array, by: number) {
  for (let i = 0; i < out.length; i++) out[i] = from[i]! * by
}

function everySecond(interleaved: Float32Array, offset: number): Float32Array {
  const out = new Float32Array(interleaved.length / 2)
  for (let i = 0; i < out.length; i++) out[i] = interleaved[2 * i + offset]!
  return out
}
