import { samplesOf, type DecodedSound, type SoundChannel } from './wav'

export interface MonoSound {
  sampleRateHz: number
  /** Mean removed, so that no step at the tap leaks into the lowest lines. */
  samples: Float32Array
  /** Largest absolute sample of all channels as recorded, full scale = 1. */
  peak: number
  /** Largest and smallest sample as recorded of the channel that was taken: where clipping would show. */
  rails: { low: number, high: number, offset: number }
}

/** Two channels are added only where they agree this well: two microphones apart would comb-filter each other. */
const COHERENT = 0.95

/**
 * One channel for the analysis: of two, their mean where they carry the same sound, else the louder unless it is clipped
 * and the other is not.
 */
export function chooseChannel(sound: DecodedSound): MonoSound {
  const stats = sound.channels.map(measure)
  const peak = Math.max(...stats.map(s => s.peak))
  if (sound.channels.length === 1) return finish(samplesOf(sound.channels[0]!), sound.sampleRateHz, peak)
  const [left, right] = sound.channels as [SoundChannel, SoundChannel]
  const [a, b] = stats as [ChannelStats, ChannelStats]
  const bothClean = a.atRail < 3 && b.atRail < 3
  if (bothClean && correlation(left, right, a, b) > COHERENT) return finish(meanOf(left, right), sound.sampleRateHz, peak)
  const audible = 0.03 // a channel 30 dB below the other is a bleed, not a choice
  const oneClips = (a.atRail >= 3) !== (b.atRail >= 3)
  const preferLeft = oneClips && Math.min(a.power, b.power) > audible ** 2 * Math.max(a.power, b.power)
    ? a.atRail < b.atRail
    : a.power >= b.power
  return finish(samplesOf(preferLeft ? left : right), sound.sampleRateHz, peak)
}

interface ChannelStats { peak: number, mean: number, power: number, atRail: number }

function measure({ values, first, every, zero, scale, length }: SoundChannel): ChannelStats {
  let peak = 0
  let sum = 0
  let squares = 0
  let atRail = 0
  for (let i = 0, j = first; i < length; i++, j += every) {
    const x = (values[j]! - zero) * scale
    const abs = Math.abs(x)
    if (abs > peak) peak = abs
    if (abs >= 0.999) atRail++
    sum += x
    squares += x * x
  }
  const n = Math.max(1, length)
  return { peak, mean: sum / n, power: squares / n - (sum / n) ** 2, atRail }
}

function correlation(left: SoundChannel, right: SoundChannel, a: ChannelStats, b: ChannelStats): number {
  const { values, zero, scale, length } = left
  let cross = 0
  for (let i = 0, j = 0; i < length; i++, j += 2) cross += ((values[j]! - zero) * scale - a.mean) * ((values[j + 1]! - zero) * scale - b.mean)
  const norm = length * Math.sqrt(a.power * b.power)
  return norm > 0 ? cross / norm : 0
}

function meanOf(left: SoundChannel, right: SoundChannel): Float32Array {
  const { values, zero, scale, length } = left
  const out = new Float32Array(length)
  for (let i = 0; i < length; i++) out[i] = ((values[left.first + 2 * i]! + values[right.first + 2 * i]!) / 2 - zero) * scale
  return out
}

/** Takes the mean off, in place. */
function finish(samples: Float32Array, sampleRateHz: number, peak: number): MonoSound {
  let low = Infinity
  let high = -Infinity
  let sum = 0
  for (let i = 0; i < samples.length; i++) {
    const x = samples[i]!
    if (x < low) low = x
    if (x > high) high = x
    sum += x
  }
  const offset = sum / Math.max(1, samples.length)
  for (let i = 0; i < samples.length; i++) samples[i]! -= offset
  return { sampleRateHz, samples, peak, rails: { low, high, offset } }
}
