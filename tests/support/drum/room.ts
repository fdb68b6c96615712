/** A room for the simulated drum: direct sound plus a diffuse tail of decaying noise, by fast convolution. */
import type { Random } from './random'
import type { SimRoom } from './types'

/** In-place radix-2 transform of a complex signal; the length is a power of two. */
export function fourier(re: Float64Array, im: Float64Array, inverse = false): void {
  const n = re.length
  for (let i = 1, j = 0; i < n; i++) {
    let bit = n >> 1
    for (; j & bit; bit >>= 1) j ^= bit
    j ^= bit
    if (i < j) {
      [re[i], re[j]] = [re[j]!, re[i]!];
      [im[i], im[j]] = [im[j]!, im[i]!]
    }
  }
  for (let size = 2; size <= n; size <<= 1) {
    const half = size >> 1
    const angle = (inverse ? 2 : -2) * Math.PI / size
    for (let k = 0; k < half; k++) {
      const cos = Math.cos(angle * k)
      const sin = Math.sin(angle * k)
      for (let i = k; i < n; i += size) {
        const j = i + half
        const xr = re[j]! * cos - im[j]! * sin
        const xi = re[j]! * sin + im[j]! * cos
        re[j] = re[i]! - xr
        im[j] = im[i]! - xi
        re[i]! += xr
        im[i]! += xi
      }
    }
  }
  if (inverse) {
    for (let i = 0; i < n; i++) {
      re[i]! /= n
      im[i]! /= n
    }
  }
}

/** Impulse response of the tail alone: its energy against the direct sound's is `levelDb`; it starts after 3 ms. */
export function roomTail(room: SimRoom, sampleRateHz: number, random: Random): Float64Array {
  const length = Math.ceil(room.t60S * sampleRateHz)
  const start = Math.round(0.003 * sampleRateHz)
  const tail = new Float64Array(length)
  let energy = 0
  for (let i = start; i < length; i++) {
    tail[i] = random.normal() * Math.exp(-6.9078 * i / length)
    energy += tail[i]! ** 2
  }
  const gain = Math.sqrt(10 ** (room.levelDb / 10) / energy)
  return tail.map(value => value * gain)
}

/** Adds the tail's answer to the dry signal. */
export function addRoom(dry: Float64Array, tail: Float64Array): Float64Array {
  let n = 1
  while (n < dry.length + tail.length) n <<= 1
  const re = new Float64Array(n)
  const im = new Float64Array(n)
  re.set(dry)
  // Both are real: one transform of dry + i tail serves, and their product is read off its halves.
  im.set(tail)
  fourier(re, im)
  const outRe = new Float64Array(n)
  const outIm = new Float64Array(n)
  for (let k = 0; k < n; k++) {
    const l = (n - k) % n
    const ar = (re[k]! + re[l]!) / 2
    const ai = (im[k]! - im[l]!) / 2
    const br = (im[k]! + im[l]!) / 2
    const bi = (re[l]! - re[k]!) / 2
    outRe[k] = ar * br - ai * bi
    outIm[k] = ar * bi + ai * br
  }
  fourier(outRe, outIm, true)
  return dry.map((value, i) => value + outRe[i]!)
}
