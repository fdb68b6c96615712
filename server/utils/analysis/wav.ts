import * as wavefile from 'wavefile'
import { RefusalError } from './refusal'
import { findSound, type RiffSound } from './riff'

/** One channel as it lies in the file: sample i is (values[first + every * i] - zero) * scale, full scale = 1. */
export interface SoundChannel {
  values: Uint8Array | Int16Array | Int32Array | Float32Array | Float64Array
  first: number
  every: number
  zero: number
  scale: number
  length: number
}

export interface DecodedSound {
  sampleRateHz: number
  /** Float files may go beyond full scale. */
  channels: SoundChannel[]
  /** As a person would say it: '16 bit', '32 bit float'. */
  bitDepth: string
  durationS: number
}

interface ParsedWave { fmt: { numChannels: number, sampleRate: number, bitsPerSample: number } }
/** Blocks that wavefile is shown. */
const OPENING_BLOCKS = 4096

type WaveFileClass = new (bytes: Uint8Array) => ParsedWave

// The package is CommonJS to Node and to the worker's bundler, a true module to Vite: take the class from where it is.
const loaded = wavefile as unknown as { WaveFile?: WaveFileClass, default?: { WaveFile?: WaveFileClass } }
const WaveFile = (loaded.WaveFile ?? loaded.default?.WaveFile) as WaveFileClass

/**
 * Reads a WAV file: PCM of 8, 16, 24 or 32 bit, float of 32 or 64 bit, plain or extensible header, one or two channels.
 *
 * wavefile sees only a two-chunk file rebuilt from checked figures (riff.ts says why) with the first moments of the sound;
 * all of it is then read through a typed view of the upload's own bytes, since two minutes in stereo are too large to be
 * held twice.
 * @throws RefusalError not-wav, too-large, low-rate, too-short
 */
export function readWav(bytes: Uint8Array): DecodedSound {
  const sound = findSound(bytes)
  const { numChannels, sampleRate, bitsPerSample } = new WaveFile(openingFile(bytes, sound)).fmt
  const { values, zero, scale } = valuesOf(bytes, sound)
  const length = values.length / numChannels
  if (sound.float && !allFinite(values)) throw new RefusalError('not-wav', 'The WAV file holds values that are not numbers. Save it as 16 or 24 bit and send it again.')
  return {
    sampleRateHz: sampleRate,
    channels: Array.from({ length: numChannels }, (_, first) => ({ values, first, every: numChannels, zero, scale, length })),
    bitDepth: `${bitsPerSample} bit${sound.float ? ' float' : ''}`,
    durationS: length / sampleRate,
  }
}

/** A channel's samples, full scale = 1. */
export function samplesOf({ values, first, every, zero, scale, length }: SoundChannel): Float32Array {
  const out = new Float32Array(length)
  for (let i = 0, j = first; i < length; i++, j += every) out[i] = (values[j]! - zero) * scale
  return out
}

/** A file of just `fmt ` and the opening of `data`, the format code plain even where the original was extensible. */
function openingFile(bytes: Uint8Array, sound: RiffSound): Uint8Array {
  const blockBytes = sound.channels * sound.bitsPerSample / 8
  const dataBytes = Math.min(sound.dataBytes, OPENING_BLOCKS * blockBytes)
  const out = new Uint8Array(44 + dataBytes + (dataBytes & 1))
  const view = new DataView(out.buffer)
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
  view.setUint32(40, dataBytes, true)
  out.set(bytes.subarray(sound.dataStart, sound.dataStart + dataBytes), 44)
  return out
}

/** Little-endian sample bytes as numbers: integers reach 2^(bits - 1) at full scale; 8 bit is offset binary. */
function valuesOf(bytes: Uint8Array, sound: RiffSound): Pick<SoundChannel, 'values' | 'zero' | 'scale'> {
  const step = sound.bitsPerSample / 8
  const data = bytes.subarray(sound.dataStart, sound.dataStart + sound.dataBytes)
  const count = data.length / step
  if (step === 1) return { values: data, zero: 128, scale: 1 / 128 }
  if (step === 3) {
    const values = new Int32Array(count)
    for (let i = 0, j = 0; i < count; i++, j += 3) values[i] = data[j]! << 8 | data[j + 1]! << 16 | data[j + 2]! << 24
    return { values, zero: 0, scale: 2 ** -31 }
  }
  const { buffer, byteOffset } = data.byteOffset % step === 0 ? data : new Uint8Array(data)
  if (sound.float) return { values: step === 4 ? new Float32Array(buffer, byteOffset, count) : new Float64Array(buffer, byteOffset, count), zero: 0, scale: 1 }
  return step === 2 ? { values: new Int16Array(buffer, byteOffset, count), zero: 0, scale: 2 ** -15 } : { values: new Int32Array(buffer, byteOffset, count), zero: 0, scale: 2 ** -31 }
}

function allFinite(values: ArrayLike<number>): boolean {
  for (let i = 0; i < values.length; i++) if (!Number.isFinite(values[i]!)) return false
  return true
}
