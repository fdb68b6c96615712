import { type HeadFilm, filmStress } from '../../../shared/acoustics'
import type { RodTurns, TurnSheetView } from '../../../shared/schemas/turnSheet'
import type { RodTension } from '../../../shared/types/reading'
import type { Construction } from '../analysis/types'
import { DomainError } from '../core/errors'
import { cautionsFor } from './cautions'
import { crossOrder } from './crossOrder'
import { evenTurns, predictRim } from './even'
import type { Kappa } from './kappa'
import { limitPass, yieldTension } from './passLimits'
import type { AnchoredPitch } from './pitch'
import { idealRisePerTurn, type RodKernelOptions } from './rodKernel'

/** What a turn sheet is made from; SI. */
export interface TurnSituation {
  construction: Construction
  reading: { tensionNPerM: number, doubtful: boolean, rods: RodTension[] | null }
  film: HeadFilm
  material: 'pet' | 'skin' | 'woven' | 'other'
  rods: Omit<RodKernelOptions, 'kappa'>
  kappa: Kappa
  pitch: AnchoredPitch
}

export type TurnGoal = { kind: 'mean', tensionNPerM: number } | { kind: 'even' }

export type TurnAdvice = Pick<TurnSheetView, 'rods' | 'order' | 'predicted' | 'goal' | 'filmStress' | 'cautions' | 'remainingPasses'>

/**
 * The turns of one pass from a reading towards a goal: all rods alike for a mean tension, each its own to even a head out;
 * whole sixteenths, half a turn at the most, and never so far that the film could yield or hang loose if the rods pull
 * harder than is known.
 * @throws DomainError bad-input when the film yields before the goal; conflict when evening out lacks a round
 */
export function adviseTurns(situation: TurnSituation, goal: TurnGoal): TurnAdvice {
  const { reading, kappa, rods, pitch } = situation
  const rise = idealRisePerTurn(rods)
  const goalNPerM = goal.kind === 'mean' ? goal.tensionNPerM : reading.tensionNPerM
  refuseYield(situation, goalNPerM)
  const wanted = goal.kind === 'even' ? null : Math.round(16 * (goalNPerM - reading.tensionNPerM) / (kappa.value * rise))
  const pass = wanted === null ? evenTurns(situation) : Array.from({ length: rods.rodCount }, () => limitPass({ tensionNPerM: reading.tensionNPerM, film: situation.film, kappa, rise }, wanted))
  const turns: RodTurns[] = pass.map((sixteenths, index) => ({ rod: index + 1, turns: sixteenths / 16 }))
  const meanTurns = turns.reduce((sum, rod) => sum + rod.turns, 0) / turns.length
  const tensionNPerM = reading.tensionNPerM + kappa.value * rise * meanTurns
  const rim = reading.rods && predictRim(situation, turns)
  const stress = filmStress(situation.film, tensionNPerM)
  const remainingPasses = wanted === null || pass[0] === 0 ? 0 : Math.ceil(Math.abs(wanted) / Math.abs(pass[0]!)) - 1
  const highestNPerM = rim ? Math.max(...rim.tensions) : tensionNPerM
  return {
    rods: turns,
    order: crossOrder(rods.rodCount),
    predicted: {
      tensionNPerM,
      fundamentalHz: pitch.fundamentalHz(tensionNPerM),
      evennessPercent: rim?.evennessPercent ?? null,
      principalHz: situation.construction === 'kettle' ? pitch.principalHz(tensionNPerM) : null,
    },
    goal: { tensionNPerM: goalNPerM, fundamentalHz: pitch.fundamentalHz(goalNPerM) },
    filmStress: { mPa: stress.stressPa / 1e6, shareOfYield: stress.shareOfYield },
    cautions: cautionsFor({
      situation, turns, wanted, remainingPasses, meanTurns, rise,
      highestShare: filmStress(situation.film, Math.max(highestNPerM, goalNPerM)).shareOfYield,
    }),
    remainingPasses,
  }
}

function refuseYield({ film, reading, pitch }: TurnSituation, goalNPerM: number): void {
  const most = yieldTension(film)
  if (goalNPerM < most || goalNPerM <= reading.tensionNPerM) return
  const advised = 0.8 * most
  throw new DomainError('bad-input', `At ${goalNPerM.toFixed(0)} N/m this film is past its yield stress and stays stretched. It yields at about ${most.toFixed(0)} N/m; up to ${advised.toFixed(0)} N/m, ${pitch.fundamentalHz(advised).toFixed(0)} Hz, can be reached with care.`, [{ path: 'target', message: 'The film yields before that.' }])
}
