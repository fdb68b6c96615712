import type { ExplainRequest } from './explanation'
import type { MatchingContext } from './matchingContext'
import type { PriorKind } from './matchingNuisance'
import { EDGE_MEAN, INPUT_UNCERTAINTY } from './matchingPriors'
import type { TensionFit } from './tensionFit'
import { solveWeighted } from './tensionSolve'
import type { BudgetLine } from '../../../shared/types/reading'

export interface TensionBudget {
  lines: BudgetLine[]
  u95NPerM: number
  repeatabilityU95NPerM: number
  /** Residuals against what the model's errors allow: 1 = as expected. */
  scatter: number
}

/** Weight of the model's own idea of its errors in judging the scatter, in degrees of freedom. */
const PRIOR_FREEDOM = 5
/** No reading repeats better: the hand, the bench and the film's creep. Relative, one standard deviation. */
const LEAST_REPEATABILITY = 0.0003
/** Another tap sounds other modes, each with its own error of the model: this share of that comes anew with every tap. */
const OTHER_MODES = 0.8

/** Two-sided 95 % quantile of Student's t, within 0.3 % from 2 degrees of freedom on. Source: Abramowitz & Stegun 26.7.5. */
export function studentT95(freedom: number): number {
  const z = 1.959964
  const n = Math.max(2, freedom)
  const g1 = (z ** 3 + z) / 4
  const g2 = (5 * z ** 5 + 16 * z ** 3 + 3 * z) / 96
  const g3 = (3 * z ** 7 + 19 * z ** 5 + 17 * z ** 3 - 15 * z) / 384
  const g4 = (79 * z ** 9 + 776 * z ** 7 + 1482 * z ** 5 - 1920 * z ** 3 - 945 * z) / 92160
  return z + g1 / n + g2 / n ** 2 + g3 / n ** 3 + g4 / n ** 4
}

interface Part { name: string, kind: 'A' | 'B', relative: number, source: string, repeatable: boolean, freedom: number }

/**
 * Uncertainty of the tension by the GUM: each contribution alone, combined in squares, expanded to 95 % by the effective
 * degrees of freedom (Welch-Satterthwaite).
 *
 * Every row of the fit moves ln T by its gain times its own error; and so do
 * the priors of air, edge and the maker's own figures.
 * Source: JCGM 100:2008, sections 5.1 and G.4.
 */
export function tensionBudget(context: MatchingContext, fit: TensionFit, request: ExplainRequest): TensionBudget {
  const { gains } = solveWeighted(fit.rows)
  const modeRows = fit.rows.map((row, i) => ({ row, gain: gains[i]! })).filter(r => r.row.source.kind === 'mode')
  const freedom = Math.max(0, modeRows.length - 1)
  const chi = modeRows.reduce((sum, { row }) => sum + (row.residual / row.error) ** 2, 0)
  const scatter = Math.sqrt((PRIOR_FREEDOM + chi) / (PRIOR_FREEDOM + freedom))
  let noise = 0
  let spread = 0
  let uneven = 0
  for (const { row, gain } of modeRows) {
    if (row.source.kind !== 'mode') continue
    noise += (gain * row.source.noise) ** 2
    const own = row.source.modelError ** 2 - row.source.uneven ** 2
    spread += gain ** 2 * own * Math.max(1, scatter) ** 2
    uneven += (gain * row.source.uneven * Math.max(1, scatter)) ** 2
  }
  const fromPriors = (kind: string) => Math.sqrt(fit.rows.reduce((sum, row, i) => sum + (row.source.kind === kind ? (gains[i]! * row.error) ** 2 : 0), 0))
  const parts: Part[] = [
    { name: 'frequency', kind: 'A', relative: Math.sqrt(noise), source: 'standard errors of the lines found in this recording', repeatable: true, freedom: 30 },
    { name: 'spread across modes', kind: 'A', relative: Math.sqrt(spread), source: `residuals of ${modeRows.length} modes and the model's own error by mode`, repeatable: false, freedom: PRIOR_FREEDOM + freedom },
    { name: 'uneven head', kind: 'B', relative: Math.sqrt(uneven), source: 'which line of an uneven pair a tap sounds: half its split, for a swing of 1.5 % at the rim', repeatable: true, freedom: 30 },
    ...priorParts(context, request).map(({ kind, name, source, repeatable = false }) => ({ name, kind: 'B' as const, relative: fromPriors(kind), source, repeatable, freedom: Infinity })),
  ]
  const variance = parts.reduce((sum, part) => sum + part.relative ** 2, 0)
  const tension = fit.tensionNPerM
  const coverage = studentT95(variance ** 2 / parts.reduce((sum, part) => sum + part.relative ** 4 / part.freedom, 1e-30))
  const repeat = Math.hypot(LEAST_REPEATABILITY, OTHER_MODES * Math.sqrt(spread), ...parts.filter(part => part.repeatable).map(part => part.relative))
  return {
    lines: parts.map(({ name, kind, relative, source, repeatable }) => ({ name, kind, standardNPerM: relative * tension, share: relative ** 2 / variance, source, repeatable })),
    u95NPerM: coverage * Math.sqrt(variance) * tension,
    repeatabilityU95NPerM: studentT95(30) * repeat * tension,
    scatter,
  }
}

interface PriorPart { kind: PriorKind, name: string, source: string, repeatable?: boolean }

/** Contributions that come from what is known beforehand, with where that comes from. */
function priorParts(context: MatchingContext, { instrument }: ExplainRequest): PriorPart[] {
  const { priors, twoHeads } = context
  const { uncertainty, calibration } = instrument
  const diameterMm = 2000 * instrument.radiusM
  const measured = uncertainty?.diameterMm
  const weighed = uncertainty?.arealDensityRelative
  const parts: PriorPart[] = calibration
    ? [{ kind: 'calibration', name: 'calibration', source: `air, edge, diameter and areal density as found at a known ${calibration.tensionNPerM.value.toFixed(0)} +- ${calibration.tensionNPerM.standard.toFixed(0)} N/m` }]
    : [
        { kind: 'air', name: 'air load', source: `scale of the added air mass on this construction: ${priors.airAxisymmetric} for m = 0, ${priors.airOthers} for m >= 1` },
        { kind: 'edge', name: 'film bend at the edge', source: `edge factor ${EDGE_MEAN} +- ${priors.edgeFactor} of the layer sqrt(D/T)` },
        { kind: 'diameter', name: 'diameter', source: `${(measured ?? diameterMm * INPUT_UNCERTAINTY.radius).toFixed(2)} mm on ${diameterMm.toFixed(0)} mm, ${measured === undefined ? 'by tape' : 'as measured by the maker'}` },
        { kind: 'density', name: 'areal density', source: weighed === undefined ? `${100 * INPUT_UNCERTAINTY.arealDensity} % of the film's data sheet` : `${(100 * weighed).toFixed(2)} %, by the maker's scale` },
      ]
  parts.push(
    { kind: 'modulus', name: 'film modulus', source: `${100 * INPUT_UNCERTAINTY.modulus} % of the film's data sheet` },
    { kind: 'temperature', name: 'temperature', source: `${INPUT_UNCERTAINTY.temperatureK} K at the bench, through the density of the air`, repeatable: true },
  )
  if (twoHeads) parts.push({ kind: 'other', name: 'other head', source: 'tension of the head that was not struck' })
  return parts
}
