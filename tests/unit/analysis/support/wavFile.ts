/** WAV files laid out by hand, byte by byte, so that readers are tested against the format and not against a writer's habits. */

export type SampleKind = 'u8' | 's16' | 's24' | 's32' | 'f32' | 'f64'
const BITS: Record<SampleKind, number> = { u8: 8, s16: 16, s24: 24, s32: 32, f32: 32, f64: 64 }

export interface WavOptions {
  kind?: SampleKind
  sampleRateHz?: number
  extensible?: boolean
  /** Chunks between `fmt ` and `data`. */
  extraChunks?: { name: string, size?: number, bytes: Uint8Array }[]
  /** What the header says instead of the truth. */
  claims?: Partial<{ code: number, channels: number, sampleRateHz: number, blockBytes: number, bits: number, dataBytes: number, riffBytes: number, fmtBytes: number }>
}

export function wavFile(channels: ArrayLike<number>[], options: WavOptions = {}): Uint8Array {
  const kind = options.kind ?? 's16'
  const bits = BITS[kind]
  const data = encode(channels, kind)
  const claims = options.claims ?? {}
  const code = claims.code ?? (kind.startsWith('f') ? 3 : 1)
  const channelCount = claims.channels ?? channels.length
  const rate = claims.sampleRateHz ?? options.sampleRateHz ?? 48_000
  const block = claims.blockBytes ?? channels.length * bits / 8
  const fmt = new DataView(new ArrayBuffer(options.extensible ? 40 : 16))
  fmt.setUint16(0, options.extensible ? 0xFFFE : code, true)
  fmt.setUint16(2, channelCount, true)
  fmt.setUint32(4, rate, true)
  fmt.setUint32(8, rate * block, true)
  fmt.setUint16(12, block, true)
  fmt.setUint16(14, claims.bits ?? bits, true)
  if (options.extensible) {
    fmt.setUint16(16, 22, true)
    fmt.setUint16(18, bits, true)
    fmt.setUint32(20, channels.length === 2 ? 3 : 4, true)
    fmt.setUint16(24, code, true)
    // Tail of KSDATAFORMAT_SUBTYPE_PCM and _IEEE_FLOAT: 0000-0010-8000-00AA00389B71.
    ;[0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71].forEach((byte, i) => fmt.setUint8(26 + i, byte))
  }
  const parts = [
    chunk('fmt ', new Uint8Array(fmt.buffer), claims.fmtBytes),
    ...(options.extraChunks ?? []).map(extra => chunk(extra.name, extra.bytes, extra.size)),
    chunk('data', data, claims.dataBytes),
  ]
  const body = concat([ascii('WAVE'), ...parts])
  return concat([ascii('RIFF'), uint32(claims.riffBytes ?? body.length), body])
}

function encode(channels: ArrayLike<number>[], kind: SampleKind): Uint8Array {
  const frames = channels[0]?.length ?? 0
  const step = BITS[kind] / 8
  const view = new DataView(new ArrayBuffer(frames * channels.length * step))
  let at = 0
  const integer = (x: number, bits: number) => Math.max(-(2 ** (bits - 1)), Math.min(2 ** (bits - 1) - 1, Math.round(x * 2 ** (bits - 1))))
  for (let i = 0; i < frames; i++) {
    for (const channel of channels) {
      const x = channel[i]!
      if (kind === 'u8') view.setUint8(at, integer(x, 8) + 128)
      else if (kind === 's16') view.setInt16(at, integer(x, 16), true)
      else if (kind === 's24') {
        const value = integer(x, 24)
        view.setUint16(at, value & 0xFFFF, true)
        view.setInt8(at + 2, value >> 16)
      } else if (kind === 's32') view.setInt32(at, integer(x, 32), true)
      else if (kind === 'f32') view.setFloat32(at, x, true)
      else view.setFloat64(at, x, true)
      at += step
    }
  }
  return new Uint8Array(view.buffer)
}

function chunk(name: string, bytes: Uint8Array, claimedSize?: number): Uint8Array {
  return concat([ascii(name), uint32(claimedSize ?? bytes.length), bytes, new Uint8Array(bytes.length & 1)])
}

function uint32(value: number): Uint8Array {
  const out = new Uint8Array(4)
  new DataView(out.buffer).setUint32(0, value, true)
  return out
}

const ascii = (text: string) => Uint8Array.from(text, c => c.charCodeAt(0))

function concat(parts: Uint8Array[]): Uint8Array {
  const out = new Uint8Array(parts.reduce((sum, p) => sum + p.length, 0))
  let at = 0
  for (const part of parts) {
    out.set(part, at)
    at += part.length
  }
  return out
}
