import type { RodTurns } from '../../../shared/schemas/turnSheet'
import type { TurnSituation } from './advice'

export interface Caution { code: string, message: string }

interface Plan {
  situation: TurnSituation
  turns: RodTurns[]
  /** Sixteenths that all passes together need; null when evening out. */
  wanted: number | null
  remainingPasses: number
  meanTurns: number
  /** K_0 p, N/m a turn. */
  rise: number
  /** Highest share of yield along the way. */
  highestShare: number
}

/** A quarter turn on every rod changes most heads by a third or more. */
const LARGE_TURN = 1 / 4
/** Skins differ so much from one another that their figure holds only to a factor. */
const NEAR_YIELD = { pet: 0.6, woven: 0.6, other: 0.6, skin: 0.4 } as const
const CLOSE_TO_YIELD = 0.8

/** What to mind before turning, the gravest first; brief, because it is read with a drum key in hand. */
export function cautionsFor(plan: Plan): Caution[] {
  return [yieldCaution(plan), doubtCaution(plan), ...passCautions(plan), ...hardwareCautions(plan)].filter(caution => caution !== null)
}

function yieldCaution({ situation, highestShare }: Plan): Caution | null {
  const percent = Math.round(100 * highestShare)
  if (highestShare >= CLOSE_TO_YIELD) {
    return { code: 'close-to-yield', message: `This takes the film to ${percent} % of its yield stress: it may stay stretched or let go. Keep your face away from the head, stay inside the maker's limits for film, shell and hardware, and ask somebody who does this daily.` }
  }
  if (highestShare < NEAR_YIELD[situation.material]) return null
  return { code: 'near-yield', message: `This takes the film to ${percent} % of its yield stress. Go slowly, and stay inside the limits of the film's and the drum's makers.` }
}

function doubtCaution({ situation }: Plan): Caution | null {
  return situation.reading.doubtful ? { code: 'doubtful-reading', message: 'The reading this starts from is doubtful. Tap once more before you turn anything.' } : null
}

function passCautions({ situation, turns, wanted, remainingPasses, meanTurns, rise }: Plan): (Caution | null)[] {
  const { kappa, reading, pitch } = situation
  const still = turns.every(rod => rod.turns === 0)
  const held = still && wanted !== null && wanted !== 0
  const spread = 2 * Math.sqrt(kappa.variance) * rise * Math.abs(meanTurns)
  const after = reading.tensionNPerM + kappa.value * rise * meanTurns
  const hz = (tension: number) => pitch.fundamentalHz(Math.max(tension, 0.1 * reading.tensionNPerM)).toFixed(0)
  return [
    held ? { code: 'too-fine', message: 'Even a sixteenth of a turn could go too far here. Turn less than that, by feel, and tap again.' } : null,
    still && !held ? { code: 'no-turn-needed', message: 'This is as close as sixteenths of a turn come: nothing needs turning.' } : null,
    still || kappa.passes > 0
      ? null
      : { code: 'first-pass', message: `How far these rods pull is not known yet: expect ${hz(after - spread)} to ${hz(after + spread)} Hz. Tap again after this pass and the next will be closer.` },
    remainingPasses > 0 ? { code: 'more-passes', message: `About ${remainingPasses} more ${remainingPasses === 1 ? 'pass' : 'passes'} will be needed. Tap again after this one.` } : null,
    Math.max(...turns.map(rod => Math.abs(rod.turns))) > LARGE_TURN
      ? { code: 'large-pass', message: 'A large change: go round the rods twice, half of the turn each time.' }
      : null,
  ]
}

function hardwareCautions({ situation, turns, meanTurns, highestShare }: Plan): (Caution | null)[] {
  const tightens = turns.some(rod => rod.turns > 0)
  return [
    tightens && (meanTurns >= LARGE_TURN || highestShare >= NEAR_YIELD[situation.material])
      ? { code: 'binding-rod', message: 'A rod that turns hard or jumps is binding. Do not force it: back it off, clean and oil the thread, and start it again.' }
      : null,
    situation.construction === 'double-headed' && turns.some(rod => rod.turns !== 0)
      ? { code: 'other-head', message: 'The other head is taken to stay as it is. Both heads share the air between them, so tap it as well afterwards.' }
      : null,
  ]
}
