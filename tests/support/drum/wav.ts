/** A tiny RIFF/WAVE writer of the test drum: 16-bit PCM, mono or more channels of equal length. */

export function writeWav16(channels: Float64Array | Float64Array[], sampleRateHz: number): Uint8Array {
  const list = Array.isArray(channels) ? channels : [channels]
  const frames = list[0]!.length
  const block = 2 * list.length
  const bytes = new Uint8Array(44 + frames * block)
  const view = new DataView(bytes.buffer)
  const text = (at: number, value: string): void => [...value].forEach((letter, i) => view.setUint8(at + i, letter.charCodeAt(0)))
  text(0, 'RIFF')
  view.setUint32(4, 36 + frames * block, true)
  text(8, 'WAVEfmt ')
  view.setUint32(16, 16, true)
  view.setUint16(20, 1, true)
  view.setUint16(22, list.length, true)
  view.setUint32(24, sampleRateHz, true)
  view.setUint32(28, sampleRateHz * block, true)
  view.setUint16(32, block, true)
  view.setUint16(34, 16, true)
  text(36, 'data')
  view.setUint32(40, frames * block, true)
  for (let i = 0; i < frames; i++) {
    list.forEach((channel, j) => {
      const value = Math.max(-32768, Math.min(32767, Math.round(channel[i]! * 32767)))
      view.setInt16(44 + i * block + 2 * j, value, true)
    })
  }
  return bytes
}
