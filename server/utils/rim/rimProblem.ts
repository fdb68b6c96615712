import { rimBasis, type PredictedMode, type RimBasis } from '../../../shared/acoustics'
import { PER_TAP, TAP, parameterMap, type MicrophoneKind, type ParameterMap } from './parameters'
import type { RimPrior } from './rimFit'
import { soundingLines } from './rimLine'
import type { RimProblem } from './rimModel'
import { rimModes } from './rimModes'
import type { RoundSpectra } from './roundSpectra'

/** How many of the head's families are heard in the round's spectra, and how many more the microphone may hear by way of them. */
export interface FamilyCounts { heard: number, weighed: number }

/** Shapes reach this far above the weighed families: what an uneven rim mixes into them. */
const BASIS_OVER_WEIGHED = 1.7
/** Least reach of the bins around a mode, Hz, and the reach in line widths. */
const LEAST_REACH_HZ = 7
const REACH_WIDTHS = 3
/** Bins closer than the window tells apart carry no more, only more work. */
const BINS_A_WINDOW = 0.75
const USUAL_CONTACT_S = 0.0025
const USUAL_RADIUS = 0.85
const FILM_DECAY_PER_S = 8
const FINGER_DECAY_PER_S = 30

/** The basis of a drum for reading rims of this many rods; harmonics above half of them look like lower ones. */
export function basisFor(modes: PredictedMode[], rods: number, counts: FamilyCounts): RimBasis {
  const struck = modes.filter(mode => mode.head === 'struck')
  return rimBasis(struck.slice(0, Math.ceil(counts.weighed * BASIS_OVER_WEIGHED)), Math.max(2, Math.floor(rods / 2)))
}

/** A problem without bins yet, ready for `binsAround`. */
export function rimProblem(spectra: RoundSpectra, basis: RimBasis, rodAngles: Float64Array, microphone: MicrophoneKind): RimProblem {
  const map = parameterMap(basis, spectra.taps, microphone)
  return { spectra, basis, map, microphone, rodAngles, bins: new Int32Array(0) }
}

/** The bins around the lines that x puts into the first `heard` families, where anything stands out of the noise. */
export function binsAround(problem: RimProblem, x: Float64Array, heard: number): Int32Array {
  const { basis, map, spectra } = problem
  const lines = soundingLines(basis, map, x, rimModes(basis, map, x))
    .filter(line => line.families.some(({ family, share }) => family < heard && share > 0.5))
  const stride = Math.max(1, Math.round(BINS_A_WINDOW * (1 / (spectra.count * spectra.periodS)) / spectra.stepHz * 2))
  const bins = new Set<number>()
  for (const line of lines) {
    const reach = Math.max(LEAST_REACH_HZ, REACH_WIDTHS * (line.gamma + spectra.windowPerS) / (2 * Math.PI))
    const centre = line.omega / (2 * Math.PI)
    if (centre + reach > spectra.passHz) continue
    const from = Math.ceil((centre - reach) / spectra.stepHz / stride)
    const to = Math.floor((centre + reach) / spectra.stepHz / stride)
    for (let k = Math.max(1, from); k <= to; k++) bins.add(k * stride)
  }
  return Int32Array.from([...bins].filter(bin => spectra.spectra.reduce((sum, s) => sum + s[2 * bin]! ** 2 + s[2 * bin + 1]! ** 2, 0) > 2 * spectra.taps * spectra.noise).sort((a, b) => a - b))
}

/** What is likely of the unknowns before the round is heard. */
export function rimPrior(basis: RimBasis, map: ParameterMap): RimPrior {
  const mean = new Float64Array(map.count)
  const sd = new Float64Array(map.count).fill(1)
  sd[map.tension] = 0.04
  for (let h = 0; h < map.harmonicCount; h++) sd[map.harmonics + h] = 0.1
  mean[map.contact] = Math.log(USUAL_CONTACT_S)
  sd[map.contact] = 0.3
  mean[map.radius] = USUAL_RADIUS
  sd[map.radius] = 0.02
  for (let j = 0; j < map.familyCount; j++) {
    const family = basis.families[j]!
    sd[map.frequencies + j] = 0.02
    mean[map.decays + j] = Math.log(family.radiationPerS + (family.m === 0 ? FINGER_DECAY_PER_S : FILM_DECAY_PER_S))
    sd[map.decays + j] = 0.7
  }
  for (let i = 0; i < map.tapCount; i++) {
    const tap = map.taps + PER_TAP * i
    // The first tap sets the force and the moment that the others are told by.
    sd[tap + TAP.force] = i === 0 ? 1e-4 : 0.7
    sd[tap + TAP.time] = i === 0 ? 1e-7 : 4e-4
    sd[tap + TAP.contact] = 0.12
    sd[tap + TAP.angle] = 0.025
    sd[tap + TAP.radius] = 0.012
  }
  return { mean, sd }
}

/** The unknowns that are free: those of the first `weighed` families, all of the taps' and the rim's own; the tension is told by the families' factors. */
export function freeUnknowns({ basis, map }: RimProblem, weighed: number): (column: number) => boolean {
  const last = basis.families[Math.min(weighed, basis.families.length) - 1]!
  const weights = map.weightCount === basis.size ? last.first + last.count : weighed
  return (column) => {
    if (column >= map.taps) return true
    if (column >= map.weights) return column < map.weights + 2 * weights
    if (column >= map.decays) return column < map.decays + weighed
    if (column >= map.frequencies) return column < map.frequencies + weighed
    return column !== map.tension
  }
}
