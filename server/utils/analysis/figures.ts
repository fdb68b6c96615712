import type { Ring } from './lines'
import { powerOf, ringWindow, spectrumOf } from './spectrum'
import type { SoundFacts } from '../../../shared/types/reading'

const WAVEFORM_COLUMNS = 1200
const SPECTRUM_POINTS = 900
const SPECTRUM_FROM_HZ = 20
/** Levels below this are drawn as this: it is under the noise of any recording here. */
const LOWEST_DB = -90

/** Smallest and largest sample of each of 1200 columns over the whole recording, -1 to 1, to four places. */
export function waveformColumns(samples: Float32Array): SoundFacts['waveform'] {
  const columns = Math.max(1, Math.min(WAVEFORM_COLUMNS, samples.length))
  const minMax: number[] = []
  for (let c = 0; c < columns; c++) {
    const from = Math.floor(c * samples.length / columns)
    const to = Math.max(from + 1, Math.floor((c + 1) * samples.length / columns))
    let low = Infinity
    let high = -Infinity
    for (let n = from; n < to; n++) {
      const x = samples[n] ?? 0
      if (x < low) low = x
      if (x > high) high = x
    }
    minMax.push(rounded(low), rounded(high))
  }
  return { columns, minMax }
}

const rounded = (x: number) => Math.round(Math.max(-1, Math.min(1, x)) * 1e4) / 1e4

/**
 * Spectrum of a ring for drawing: level in dB against its strongest point on 900 even steps from 20 Hz to toHz, each the
 * loudest of the bins it covers.
 */
export function displaySpectrum(ring: Ring, toHz: number): NonNullable<SoundFacts['spectrum']> {
  const rate = ring.sampleRateHz
  const length = Math.min(ring.samples.length, Math.round(1 * rate))
  const window = ringWindow(length, Math.min(Math.round(0.012 * rate), length >> 2))
  const spectrum = spectrumOf(ring.samples.subarray(0, length), rate, window, 4 * length)
  const power = powerOf(spectrum)
  const stepHz = (toHz - SPECTRUM_FROM_HZ) / (SPECTRUM_POINTS - 1)
  const levels: number[] = []
  let strongest = 1e-300
  for (let i = 0; i < SPECTRUM_POINTS; i++) {
    const centre = SPECTRUM_FROM_HZ + i * stepHz
    const from = Math.max(0, Math.round((centre - stepHz / 2) / spectrum.stepHz))
    const to = Math.min(power.length - 1, Math.max(from, Math.round((centre + stepHz / 2) / spectrum.stepHz) - 1))
    let best = 0
    for (let k = from; k <= to; k++) best = Math.max(best, power[k]!)
    levels.push(best)
    strongest = Math.max(strongest, best)
  }
  const levelDb = levels.map(p => Math.max(LOWEST_DB, Math.round(100 * Math.log10(p / strongest + 1e-300)) / 10))
  return { fromHz: SPECTRUM_FROM_HZ, stepHz: Math.round(stepHz * 1e6) / 1e6, levelDb }
}
