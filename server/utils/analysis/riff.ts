import { RefusalError } from './refusal'

/** Largest file that is taken, bytes: two minutes of 48 kHz stereo at 32 bit fit in. */
export const MAX_RECORDING_BYTES = 50 * 1024 * 1024
/** Longest recording that is taken, s: a round of 16 rods with time to spare. */
export const MAX_RECORDING_S = 120
/** Below this rate the modes that carry the tension of a small head are cut off. */
export const MIN_SAMPLE_RATE_HZ = 8000
export const MAX_SAMPLE_RATE_HZ = 192_000

const WAVE_FORMAT_PCM = 0x0001
const WAVE_FORMAT_IEEE_FLOAT = 0x0003
const WAVE_FORMAT_EXTENSIBLE = 0xFFFE
// Bytes 2 to 15 of KSDATAFORMAT_SUBTYPE_*: the first two carry the plain format code.
const SUBTYPE_TAIL = [0x00, 0x00, 0x00, 0x00, 0x10, 0x00, 0x80, 0x00, 0x00, 0xAA, 0x00, 0x38, 0x9B, 0x71]
/** A real file has a handful of chunks before its sound; more is an attack on the reader. */
const MAX_CHUNKS = 256
/** A recorder that streams cannot go back to fill in the length: it leaves 0 or a number above any file that is taken here. */
const STREAMED_FROM_BYTES = 0x7F00_0000

export interface RiffSound {
  float: boolean
  bitsPerSample: number
  channels: number
  sampleRateHz: number
  /** The sound's bytes inside the file, whole blocks only. */
  dataStart: number
  dataBytes: number
}

/**
 * Finds the sound in a RIFF/WAVE file by a bounded walk over its chunks and refuses what cannot be trusted.
 *
 * Security model: the file comes from anyone. The walk reads chunk headers only, at most 256 of them, allocates nothing,
 * believes no length beyond the end of the file, and never looks into chunks other than `fmt ` and `data`; a general reader
 * can be held for minutes by a lying `smpl` or `cue ` chunk.
 *
 * A last block that is cut, or a missing pad byte, is dropped in silence; a file that lacks more than that of what its header
 * promises is refused, since the tap may be in the part that is missing. A length of 0 or near 4 GB, as recorders that
 * stream write it, means "to the end of the file".
 * @throws RefusalError not-wav, too-large, low-rate, too-short
 * Source: RIFF/WAVE, IBM and Microsoft 1991; WAVEFORMATEXTENSIBLE, Microsoft.
 */
export function findSound(bytes: Uint8Array): RiffSound {
  if (bytes.byteLength > MAX_RECORDING_BYTES) {
    throw new RefusalError('too-large', `The file is larger than ${MAX_RECORDING_BYTES / 1024 / 1024} MB. Cut it to the taps and send it again.`)
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength)
  if (bytes.byteLength < 12 || tag(view, 0) !== 'RIFF' || tag(view, 8) !== 'WAVE') {
    throw notWav('The file is not a WAV file, whatever its name says. Save the sound as WAV and send it again.')
  }
  let format: Omit<RiffSound, 'dataStart' | 'dataBytes'> | undefined
  let at = 12
  for (let chunk = 0; chunk < MAX_CHUNKS && at + 8 <= bytes.byteLength; chunk++) {
    const name = tag(view, at)
    const size = view.getUint32(at + 4, true)
    const start = at + 8
    if (name === 'fmt ') format = readFormat(view, start, size)
    if (name === 'data') {
      if (!format) throw notWav('The WAV file does not say how its sound is coded. Save it again from the program that made it.')
      return checkData(format, start, size, bytes.byteLength)
    }
    at = start + size + (size & 1)
  }
  throw notWav('The WAV file holds no sound that can be found. Save it again from the program that made it.')
}

function readFormat(view: DataView, start: number, size: number) {
  if (size < 16 || start + size > view.byteLength) throw notWav('The header of the WAV file is broken. Save it again from the program that made it.')
  let code = view.getUint16(start, true)
  const channels = view.getUint16(start + 2, true)
  const sampleRateHz = view.getUint32(start + 4, true)
  const blockBytes = view.getUint16(start + 12, true)
  const bitsPerSample = view.getUint16(start + 14, true)
  if (code === WAVE_FORMAT_EXTENSIBLE) {
    if (size < 40 || SUBTYPE_TAIL.some((byte, i) => view.getUint8(start + 26 + i) !== byte)) {
      throw notWav('The WAV file is coded in a way that is not read here. Save it as plain PCM, 16 or 24 bit.')
    }
    code = view.getUint16(start + 24, true)
  }
  const float = code === WAVE_FORMAT_IEEE_FLOAT
  const known = float ? [32, 64].includes(bitsPerSample) : code === WAVE_FORMAT_PCM && [8, 16, 24, 32].includes(bitsPerSample)
  if (!known) throw notWav(`The WAV file is coded in a way that is not read here (format ${code}, ${bitsPerSample} bit). Save it as plain PCM, 16 or 24 bit.`)
  if (channels < 1 || channels > 2) throw notWav(`The WAV file says it has ${channels} channels. Save it as mono or stereo.`)
  if (blockBytes !== channels * bitsPerSample / 8) throw notWav('The header of the WAV file contradicts itself. Save it again from the program that made it.')
  if (sampleRateHz === 0 || sampleRateHz > MAX_SAMPLE_RATE_HZ) throw notWav(`The WAV file says it has ${sampleRateHz} samples a second; up to ${MAX_SAMPLE_RATE_HZ} are read. Save it at 48000.`)
  if (sampleRateHz < MIN_SAMPLE_RATE_HZ) throw new RefusalError('low-rate', `The recording has only ${sampleRateHz} samples a second, too few to hear the head's higher modes. Record at 44100 or 48000.`)
  return { float, bitsPerSample, channels, sampleRateHz }
}

function checkData(format: Omit<RiffSound, 'dataStart' | 'dataBytes'>, start: number, declared: number, fileBytes: number): RiffSound {
  const blockBytes = format.channels * format.bitsPerSample / 8
  const bytesPerS = blockBytes * format.sampleRateHz
  const present = fileBytes - start
  const streamed = declared === 0 || declared >= STREAMED_FROM_BYTES
  if (!streamed && declared - present > blockBytes) {
    throw notWav(`The file is cut short: its header promises ${seconds(declared / bytesPerS)} of sound, ${seconds(present / bytesPerS)} are there. Send it again, or record again.`)
  }
  const usable = Math.min(streamed ? present : declared, present)
  const dataBytes = usable - usable % blockBytes
  if (dataBytes === 0) throw new RefusalError('too-short', 'The recording is empty. Record again: a moment of quiet, the tap, and at least a second of its ring.')
  if (dataBytes > MAX_RECORDING_S * bytesPerS) throw new RefusalError('too-large', `The recording is longer than ${MAX_RECORDING_S} s. Cut it to the taps and send it again.`)
  return { ...format, dataStart: start, dataBytes }
}

function tag(view: DataView, at: number): string {
  return String.fromCharCode(view.getUint8(at), view.getUint8(at + 1), view.getUint8(at + 2), view.getUint8(at + 3))
}

const seconds = (s: number) => `${s.toFixed(s < 1 ? 2 : 1)} s`

const notWav = (message: string) => new RefusalError('not-wav', message)
