/**
 * Random but repeatable cases for judging the analysis: instruments of every construction and size, films, places
 * struck, microphones, rooms and noise. Ranges are those in which workshops work, not those that read well.
 */
import type { Random } from './random'
import { seededRandom } from './random'
import type { SimConstruction, SimDrum, SimHarmonic, SimHead, SimTap } from './types'

export const CONSTRUCTIONS: SimConstruction[] = ['fixture', 'open', 'frame', 'kettle', 'double-headed']
export type Place = 'centre' | 'half-way' | 'edge'
export type FilmKind = 'pet' | 'pet two-ply' | 'skin'

export interface SimCase {
  name: string
  construction: SimConstruction
  place: Place
  film: FilmKind
  snrDb: number
  rodCount: number
  tap: SimTap
}

export interface CaseOptions { place?: Place, film?: FilmKind, snrDb?: number, even?: boolean, glide?: number, diameterIn?: number, fundamentalHz?: number }

const INCH = 0.0254

/** Usual diameters, in, and pitches of (0,1), Hz, at the smallest and the largest. */
const RANGES: Record<SimConstruction, { diameters: number[], highHz: [number, number], lowHz: [number, number] }> = {
  'fixture': { diameters: [8, 10, 12, 13, 14, 16, 18, 20], highHz: [140, 400], lowHz: [60, 160] },
  'open': { diameters: [8, 10, 12, 13, 14, 16, 18], highHz: [140, 400], lowHz: [65, 170] },
  'frame': { diameters: [8, 10, 12, 14, 16, 18, 20, 22], highHz: [150, 400], lowHz: [60, 170] },
  'kettle': { diameters: [23, 26, 29, 32], highHz: [120, 190], lowHz: [85, 140] },
  'double-headed': { diameters: [8, 10, 12, 13, 14, 16, 18], highHz: [140, 360], lowHz: [60, 140] },
}

export function drawFilm(kind: FilmKind, random: Random): Omit<SimHead, 'tensionNPerM'> {
  if (kind === 'skin') {
    const plyThicknessM = random.uniform(250e-6, 550e-6)
    return { plies: 1, plyThicknessM, filmDensityKgM3: 1250, modulusPa: 2.5e9, poisson: 0.35, arealDensityKgM2: plyThicknessM * 1250 }
  }
  const plies = kind === 'pet' ? 1 : 2
  const plyThicknessM = random.pick(plies === 1 ? [188e-6, 250e-6, 300e-6] : [125e-6, 178e-6, 188e-6])
  const coating = random.uniform() < 0.4 ? random.uniform(0.02, 0.06) : 0
  return { plies, plyThicknessM, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: plies * plyThicknessM * 1390 + coating }
}

/** Harmonics 2 … half the rods whose sum swings by no more than `most` of the mean. */
export function drawUnevenness(rodCount: number, most: number, random: Random): SimHarmonic[] {
  const harmonics = Array.from({ length: Math.floor(rodCount / 2) - 1 }, (_, i) => ({ k: i + 2, ratio: Math.abs(random.normal()) / (i + 2), phaseRad: random.uniform(0, 2 * Math.PI) }))
  let swing = 0
  for (let i = 0; i < 180; i++) swing = Math.max(swing, Math.abs(harmonics.reduce((sum, h) => sum + h.ratio * Math.cos(h.k * (i * Math.PI / 90 - h.phaseRad)), 0)))
  const target = random.uniform(0, most)
  return harmonics.map(h => ({ ...h, ratio: h.ratio * target / swing }))
}

/** Tension that brings (0,1) near `hz`: a rough guess of the air is enough, the truth is computed afterwards. */
function tensionFor(hz: number, radiusM: number, arealDensityKgM2: number, construction: SimConstruction): number {
  const air = 1.2 * radiusM * (construction === 'frame' ? 0.85 : 1.5)
  const spring = construction === 'kettle' ? 0.45 : construction === 'double-headed' ? 0.75 : 1
  return (2 * Math.PI * radiusM * hz / 2.4048) ** 2 * (arealDensityKgM2 + air) * spring
}

export function drawDrum(construction: SimConstruction, random: Random, options: CaseOptions = {}): { drum: SimDrum, rodCount: number, film: FilmKind } {
  const range = RANGES[construction]
  const diameterIn = options.diameterIn ?? random.pick(range.diameters)
  const radiusM = diameterIn * INCH / 2
  const film = options.film ?? random.pick<FilmKind>(['pet', 'pet', 'pet two-ply', 'skin'])
  const [smallest, largest] = [range.diameters[0]!, range.diameters.at(-1)!]
  const place = (diameterIn - smallest) / (largest - smallest)
  const blend = (i: 0 | 1): number => range.highHz[i] ** (1 - place) * range.lowHz[i] ** place
  const hz = options.fundamentalHz ?? Math.exp(random.uniform(Math.log(blend(0)), Math.log(blend(1))))
  const head = drawFilm(film, random)
  const tension = Math.min(tensionFor(hz, radiusM, head.arealDensityKgM2, construction), (film === 'skin' ? 20e6 : 55e6) * head.plyThicknessM * head.plies)
  const rodCount = diameterIn <= 12 ? 6 : 8
  const drum: SimDrum = {
    construction,
    radiusM,
    depthM: construction === 'frame' ? random.uniform(0.035, 0.08) : construction === 'fixture' ? 0 : 2 * radiusM * random.uniform(0.45, 1),
    batter: { ...head, tensionNPerM: tension },
    edgeTerm: Math.min(1, Math.max(0, 0.5 + 0.2 * random.normal())),
    temperatureC: random.uniform(5, 35),
    lossPerS: random.uniform(1, 3.5),
    lossPerHz: random.uniform(0.01, 0.035) * (film === 'skin' ? 1.6 : 1),
    unevenness: options.even ? undefined : drawUnevenness(rodCount, 0.03, random),
  }
  if (construction === 'kettle') drum.bowlVolumeM3 = Math.PI * radiusM ** 3 * random.uniform(0.9, 1.35)
  if (construction === 'double-headed') {
    const other = drawFilm('pet', random)
    drum.resonant = { ...other, tensionNPerM: tension / head.arealDensityKgM2 * other.arealDensityKgM2 * Math.exp(random.uniform(-0.5, 0.6)) }
  }
  return { drum, rodCount, film }
}

/** One case; the same seed and options give the same case. */
export function drawCase(construction: SimConstruction, seed: number, options: CaseOptions = {}): SimCase {
  const random = seededRandom(seed * 7919 + CONSTRUCTIONS.indexOf(construction))
  const { drum, rodCount, film } = drawDrum(construction, random, options)
  const place = options.place ?? random.pick<Place>(construction === 'kettle' ? ['half-way', 'edge', 'edge'] : ['centre', 'half-way', 'edge'])
  const target = { 'centre': 0, 'half-way': 0.5, 'edge': 0.76 }[place]
  const off = random.uniform(-0.15, 0.15)
  const near = random.uniform() < 0.6
  const snrDb = options.snrDb ?? random.pick([15, 25, 40])
  const tap: SimTap = {
    drum,
    strike: {
      radiusRatio: Math.abs(target + off),
      angleRad: random.uniform(0, 2 * Math.PI),
      patchM: random.uniform(0.004, 0.012),
      contactS: random.uniform(0.0015, 0.005),
      centreDamped: place === 'edge' && random.uniform() < 0.6,
      glide: options.glide ?? 0,
    },
    microphone: {
      radiusRatio: near ? random.uniform(0.2, 0.75) : random.uniform(0.5, 2.5),
      angleRad: random.uniform(0, 2 * Math.PI),
      heightM: near ? random.uniform(0.04, 0.15) : random.uniform(0.2, 0.8),
    },
    recording: {
      seed: seed + 1000,
      sampleRateHz: random.pick([44100, 48000, 48000, 96000]),
      quietS: random.uniform(0.25, 0.6),
      ringS: random.uniform(1.5, 2.5),
      snrDb,
      hum: random.uniform() < 0.35 ? { hz: random.pick([50, 60]), snrDb: snrDb + random.uniform(0, 12) } : undefined,
      room: random.uniform() < 0.6 ? { levelDb: random.uniform(-30, -16), t60S: random.uniform(0.3, 0.6) } : undefined,
      peakDbfs: random.uniform(-20, -1),
    },
  }
  return { name: `${construction} ${(drum.radiusM * 2 / INCH).toFixed(0)} in ${film} ${place} ${snrDb} dB #${seed}`, construction, place, film, snrDb, rodCount, tap }
}
