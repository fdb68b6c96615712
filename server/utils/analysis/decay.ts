/** A decaying cosine as the fit carries it: x(t) = 2 Re((re + i im) exp((-gamma + 2 pi i f) t)), t from the start of the ring. */
export interface DecayingTone {
  frequencyHz: number
  gammaPerS: number
  re: number
  im: number
}

/** The sampled ring that a tone is fitted to: its rate, length and zero-padded spectrum. */
export interface RingGrid {
  sampleRateHz: number
  /** Samples before padding. */
  length: number
  /** Transform length. */
  size: number
}

/** Complex values on bins from … from + count - 1, interleaved. */
export type BinBand = { from: number, count: number, values: Float64Array }

/**
 * Spectrum of a sampled decaying exponential z^n, n = 0 … N - 1, on a run of bins, and its derivative by s = ln z.
 *
 *   G = (1 - u^N) / (1 - u),  dG/ds = sum n u^n = u (1 - u^N) / (1 - u)^2 - N u^N / (1 - u),  u = z exp(-2 pi i k / size)
 *
 * @param frequencyHz  may be negative: the image of a real tone
 * @param slope        receives dG/ds when given
 */
export function exponentialSpectrum(grid: RingGrid, frequencyHz: number, gammaPerS: number, from: number, count: number, out: Float64Array, slope?: Float64Array) {
  const { sampleRateHz: rate, length: n, size } = grid
  const r = Math.exp(-gammaPerS / rate)
  const rN = Math.exp(-gammaPerS * n / rate)
  const turn = 2 * Math.PI / size
  const w = 2 * Math.PI * frequencyHz / rate
  // Both angles advance evenly from bin to bin: rotate instead of calling sin and cos for each.
  let c = Math.cos(w - turn * from)
  let s = Math.sin(w - turn * from)
  let cN = Math.cos((w - turn * from) * n)
  let sN = Math.sin((w - turn * from) * n)
  const dc = Math.cos(turn)
  const ds = -Math.sin(turn)
  const dcN = Math.cos(turn * n)
  const dsN = -Math.sin(turn * n)
  for (let k = 0; k < count; k++) {
    const ur = r * c
    const ui = r * s
    const pr = rN * cN
    const pi = rN * sN
    // q = 1 / (1 - u), g = (1 - u^N) q
    const dr = 1 - ur
    const norm = 1 / (dr * dr + ui * ui)
    const qr = dr * norm
    const qi = ui * norm
    const gr = (1 - pr) * qr + pi * qi
    const gi = (1 - pr) * qi - pi * qr
    out[2 * k] = gr
    out[2 * k + 1] = gi
    if (slope) {
      const ar = ur * qr - ui * qi
      const ai = ur * qi + ui * qr
      slope[2 * k] = gr * ar - gi * ai - n * (pr * qr - pi * qi)
      slope[2 * k + 1] = gr * ai + gi * ar - n * (pr * qi + pi * qr)
    }
    const nc = c * dc - s * ds
    s = c * ds + s * dc
    c = nc
    const ncN = cN * dcN - sN * dsN
    sN = cN * dsN + sN * dcN
    cN = ncN
  }
}

/** Subtracts a tone, its image at the negative frequency included (or only that image), from a run of bins. */
export function subtractTone(grid: RingGrid, tone: DecayingTone, band: BinBand, scratch: Float64Array, only?: 'image') {
  const v = band.values
  if (only !== 'image') {
    exponentialSpectrum(grid, tone.frequencyHz, tone.gammaPerS, band.from, band.count, scratch)
    for (let k = 0; k < 2 * band.count; k += 2) {
      v[k]! -= tone.re * scratch[k]! - tone.im * scratch[k + 1]!
      v[k + 1]! -= tone.re * scratch[k + 1]! + tone.im * scratch[k]!
    }
  }
  exponentialSpectrum(grid, -tone.frequencyHz, tone.gammaPerS, band.from, band.count, scratch)
  for (let k = 0; k < 2 * band.count; k += 2) {
    v[k]! -= tone.re * scratch[k]! + tone.im * scratch[k + 1]!
    v[k + 1]! -= tone.re * scratch[k + 1]! - tone.im * scratch[k]!
  }
}

/**
 * Subtracts tones from the sampled ring itself, in place.
 * @param ring          samples, in units of full scale
 * @param sampleRateHz  Hz
 */
export function subtractFromRing(ring: Float64Array, sampleRateHz: number, tones: DecayingTone[]) {
  for (const tone of tones) {
    const r = Math.exp(-tone.gammaPerS / sampleRateHz)
    const w = 2 * Math.PI * tone.frequencyHz / sampleRateHz
    const zr = r * Math.cos(w)
    const zi = r * Math.sin(w)
    let re = 2 * tone.re
    let im = 2 * tone.im
    for (let n = 0; n < ring.length; n++) {
      ring[n]! -= re
      const next = re * zr - im * zi
      im = re * zi + im * zr
      re = next
    }
  }
}
