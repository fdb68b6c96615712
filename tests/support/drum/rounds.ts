/** Random but repeatable rounds of taps for judging how a rim is read: drums as in cases.ts, heads pulled unevenly. */
import { drawDrum, drawUnevenness, type FilmKind } from './cases'
import { seededRandom } from './random'
import type { SimRound } from './simulateRound'
import type { SimConstruction } from './types'

export interface RoundCase {
  name: string
  construction: SimConstruction
  film: FilmKind
  snrDb: number
  round: SimRound
}

export interface RoundOptions { snrDb?: number, rodCount?: number, uneven?: [number, number], follows?: boolean, room?: boolean }

const ROUND_CONSTRUCTIONS: SimConstruction[] = ['open', 'frame', 'fixture', 'kettle', 'double-headed']

/** One round; the same seed and options give the same. Taps are paced unevenly, a fifth of a second about the spacing. */
export function drawRound(construction: SimConstruction, seed: number, options: RoundOptions = {}): RoundCase {
  const random = seededRandom(seed * 104_729 + ROUND_CONSTRUCTIONS.indexOf(construction))
  const { drum, film } = drawDrum(construction, random, { even: true })
  const rodCount = options.rodCount ?? random.pick([5, 6, 8, 8, 10])
  const [least, most] = options.uneven ?? [0.03, 0.2]
  const snrDb = options.snrDb ?? random.pick([15, 25, 40])
  const swing = Math.exp(random.uniform(Math.log(least), Math.log(most)))
  // drawUnevenness draws its own swing up to what it is given: here it is wanted exactly.
  const drawn = drawUnevenness(rodCount, 1, random)
  let found = 0
  for (let i = 0; i < 180; i++) found = Math.max(found, Math.abs(drawn.reduce((sum, h) => sum + h.ratio * Math.cos(h.k * (i * Math.PI / 90 - h.phaseRad)), 0)))
  const follows = options.follows ?? random.uniform() < 0.5
  return {
    name: `${construction} ${(drum.radiusM * 2 / 0.0254).toFixed(0)} in ${film} ${rodCount} rods ${(100 * swing).toFixed(0)} % ${snrDb} dB ${follows ? 'following' : 'fixed'} #${seed}`,
    construction, film, snrDb,
    round: {
      drum: { ...drum, unevenness: drawn.map(h => ({ ...h, ratio: h.ratio * swing / found })) },
      rodCount,
      strike: { radiusRatio: 0.85, patchM: random.uniform(0.004, 0.01), contactS: random.uniform(0.0015, 0.004), centreDamped: true },
      microphone: { radiusRatio: random.uniform(0.3, 0.7), angleRad: random.uniform(0, 2 * Math.PI), heightM: random.uniform(0.03, 0.06), follows },
      recording: {
        seed: seed + 4000,
        sampleRateHz: 48_000,
        quietS: random.uniform(0.3, 0.6),
        spacingS: random.uniform(0.9, 2.2),
        snrDb,
        room: (options.room ?? random.uniform() < 0.6) ? { levelDb: random.uniform(-30, -16), t60S: random.uniform(0.3, 0.6) } : undefined,
        peakDbfs: random.uniform(-12, -2),
      },
    },
  }
}
