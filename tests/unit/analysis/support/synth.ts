/** Sounds made up for tests: decaying tones, noise, a room. Nothing here uses the code under test. */

/** Repeatable uniform numbers in [0, 1). Source: mulberry32, public domain. */
export function uniform(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6D2B79F5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

/** Repeatable normal numbers, mean 0, variance 1. Source: Box & Muller 1958. */
export function gaussian(seed: number): () => number {
  const next = uniform(seed)
  return () => Math.sqrt(-2 * Math.log(1 - next())) * Math.cos(2 * Math.PI * next())
}

export interface Partial { frequencyHz: number, amplitude: number, gammaPerS: number, phaseRad?: number }

export interface TapPlan {
  sampleRateHz?: number
  durationS?: number
  tapsAtS?: number[]
  partials: Partial[]
  /** White noise, rms in full scale. */
  noise?: number
  seed?: number
  /** Room: reverberant share of the direct sound and its decay time. */
  room?: { level: number, t60S: number }
}

/** Taps on an ideal drum: each partial starts at the tap after a 2 ms contact. */
export function tapSound(plan: TapPlan): Float64Array {
  const rate = plan.sampleRateHz ?? 48_000
  const out = new Float64Array(Math.round((plan.durationS ?? 3) * rate))
  for (const atS of plan.tapsAtS ?? [0.4]) {
    const first = Math.round(atS * rate)
    for (const p of plan.partials) {
      for (let n = first; n < out.length; n++) {
        const t = (n - first) / rate
        const rise = t < 0.002 ? 0.5 - 0.5 * Math.cos(Math.PI * t / 0.002) : 1
        const env = p.amplitude * Math.exp(-p.gammaPerS * t) * rise
        if (env < 1e-9 && t > 0.01) break
        out[n]! += env * Math.cos(2 * Math.PI * p.frequencyHz * t + (p.phaseRad ?? 0))
      }
    }
  }
  const heard = plan.room ? addRoom(out, rate, plan.room, (plan.seed ?? 1) + 77) : out
  const normal = gaussian(plan.seed ?? 1)
  if (plan.noise) for (let n = 0; n < heard.length; n++) heard[n]! += plan.noise * normal()
  return heard
}

/** Adds a diffuse tail: the sound convolved with sparse decaying noise. */
function addRoom(dry: Float64Array, rate: number, room: { level: number, t60S: number }, seed: number): Float64Array {
  const next = uniform(seed)
  const out = dry.slice()
  const echoes = 600
  const scale = room.level / Math.sqrt(echoes * room.t60S / 13.8)
  for (let e = 0; e < echoes; e++) {
    const t = 0.004 + next() * room.t60S
    const gain = scale * (next() < 0.5 ? -1 : 1) * Math.exp(-6.908 * t / room.t60S) * Math.sqrt(room.t60S)
    const shift = Math.round(t * rate)
    for (let n = shift; n < out.length; n++) out[n]! += gain * dry[n - shift]!
  }
  return out
}
