import { Matrix, solve } from 'ml-matrix'
import type { RodTurns } from '../../../shared/schemas/turnSheet'
import { DomainError } from '../core/errors'
import type { TurnSituation } from './advice'
import { MOST_SIXTEENTHS } from './passLimits'
import { rodKernel } from './rodKernel'

/** Rods want no more than this without reason, turns: the weight of small turns against a perfect rim. */
const USUAL_TURN = 1 / 8

function kernelMatrix({ rods, kappa }: TurnSituation): Matrix {
  const row = rodKernel({ ...rods, kappa: Math.min(1, kappa.value) })
  return new Matrix(row.map((_, i) => row.map((_, j) => row[Math.abs(i - j)]!)))
}

/**
 * Sixteenths for each rod that bring the rim to its own mean: least |d - G u|^2 + lambda |u|^2 with d the missing tension,
 * lambda the readings' variance over the square of a usual turn, then rounded and held to half a turn. All zero where
 * rounding would not leave the head more even than it is.
 * @throws DomainError conflict without a round
 */
export function evenTurns(situation: TurnSituation): number[] {
  const rods = situation.reading.rods
  if (!rods?.length) throw new DomainError('conflict', 'Evening out needs a reading of every rod. Record a round first: one tap at each rod, in order.')
  const kernel = kernelMatrix(situation)
  const tensions = byRod(situation)
  const mean = tensions.reduce((sum, t) => sum + t, 0) / tensions.length
  const missing = Matrix.columnVector(tensions.map(t => mean - t))
  const standard = Math.max(...rods.map(rod => rod.u95NPerM / 2), 0.005 * mean)
  const lambda = (standard / USUAL_TURN) ** 2
  const normal = Matrix.add(kernel.transpose().mmul(kernel), Matrix.eye(tensions.length).mul(lambda))
  const turns = solve(normal, kernel.transpose().mmul(missing)).to1DArray()
  const sixteenths = turns.map(u => Math.max(-MOST_SIXTEENTHS, Math.min(MOST_SIXTEENTHS, Math.round(16 * u))) || 0)
  const after = predictRim(situation, sixteenths.map((s, i) => ({ rod: i + 1, turns: s / 16 })))
  return after.evennessPercent < halfRangePercent(tensions) ? sixteenths : tensions.map(() => 0)
}

/** Tension at rods 1 to n. */
function byRod({ reading, rods }: TurnSituation): number[] {
  const found = new Map(reading.rods?.map(rod => [rod.rod, rod.nPerM]))
  return Array.from({ length: rods.rodCount }, (_, i) => found.get(i + 1) ?? reading.tensionNPerM)
}

export interface PredictedRim { tensions: number[], evennessPercent: number }

/** The rim after these turns: what was read plus G u. */
export function predictRim(situation: TurnSituation, turns: RodTurns[]): PredictedRim {
  const change = kernelMatrix(situation).mmul(Matrix.columnVector(turns.map(rod => rod.turns))).to1DArray()
  const tensions = byRod(situation).map((tension, i) => tension + change[i]!)
  return { tensions, evennessPercent: halfRangePercent(tensions) }
}

/** Half the range of the deviations from the mean, %. */
function halfRangePercent(tensions: number[]): number {
  const mean = tensions.reduce((sum, t) => sum + t, 0) / tensions.length
  return 50 * (Math.max(...tensions) - Math.min(...tensions)) / mean
}
