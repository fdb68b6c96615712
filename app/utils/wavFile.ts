/** Bits a sample; 24 keeps all that a microphone and its converter deliver. */
const BIT_DEPTH = '24'
const FULL_SCALE = 2 ** 23 - 1
/** Decoded sound is brought to this rate; the head's modes lie far below half of it. */
const DECODE_RATE_HZ = 48_000

/** RIFF/WAVE by its first bytes; a file's name says nothing. */
export async function isWav(file: Blob): Promise<boolean> {
  const head = new Uint8Array(await file.slice(0, 12).arrayBuffer())
  const text = (from: number, to: number) => String.fromCharCode(...head.subarray(from, to))
  return head.length === 12 && text(0, 4) === 'RIFF' && text(8, 12) === 'WAVE'
}

/** Samples from -1 to 1, one array a channel, as a 24-bit WAV. */
export async function encodeWav(channels: readonly Float32Array[], sampleRateHz: number): Promise<Blob> {
  // Loaded when it is needed: most visits send a WAV as it is.
  const { WaveFile } = await import('wavefile')
  const wav = new WaveFile()
  const samples = channels.map(channel => Int32Array.from(channel, value => Math.round(Math.max(-1, Math.min(1, value)) * FULL_SCALE)))
  wav.fromScratch(samples.length, sampleRateHz, BIT_DEPTH, samples.length === 1 ? samples[0]! : samples)
  return new Blob([wav.toBuffer() as Uint8Array<ArrayBuffer>], { type: 'audio/wav' })
}

/** Whatever sound this browser can decode (m4a, mp3, ogg, flac), as a WAV; undefined when it cannot. */
export async function decodeToWav(file: Blob): Promise<Blob | undefined> {
  const context = new OfflineAudioContext(1, 1, DECODE_RATE_HZ)
  let sound: AudioBuffer
  try {
    sound = await context.decodeAudioData(await file.arrayBuffer())
  } catch {
    return undefined
  }
  const channels = Array.from({ length: Math.min(2, sound.numberOfChannels) }, (_, index) => sound.getChannelData(index))
  return encodeWav(channels, sound.sampleRate)
}
