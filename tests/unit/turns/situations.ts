import { airAt, createDrumModel, type HeadFilm } from '../../../shared/acoustics'
import type { TurnSituation } from '../../../server/utils/turns/advice'
import { type Kappa, KAPPA_PRIOR } from '../../../server/utils/turns/kappa'
import { anchorPitch } from '../../../server/utils/turns/pitch'

export const film: HeadFilm = { plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475 }
const radiusM = 0.1778

export const tomModel = createDrumModel({ geometry: { construction: 'open', radiusM, depthM: 0.2 }, film, air: airAt({ temperatureC: 20 }) })

interface Changes { tensionNPerM?: number, kappa?: Kappa, doubtful?: boolean, deviationsPercent?: number[], construction?: TurnSituation['construction'] }

/** A 14 in head on eight rods, read at 2400 N/m unless told otherwise. */
export function situation(changes: Changes = {}): TurnSituation {
  const tensionNPerM = changes.tensionNPerM ?? 2400
  return {
    construction: changes.construction ?? 'open',
    reading: {
      tensionNPerM,
      doubtful: changes.doubtful ?? false,
      rods: changes.deviationsPercent?.map((deviationPercent, i) => ({ rod: i + 1, nPerM: tensionNPerM * (1 + deviationPercent / 100), u95NPerM: 10, deviationPercent })) ?? null,
    },
    film,
    material: 'pet',
    rods: { rodCount: 8, radiusM, filmStiffnessNPerM: film.modulusPa * film.plyThicknessM, poisson: film.poisson, threadPitchM: 1.058e-3 },
    kappa: changes.kappa ?? KAPPA_PRIOR,
    pitch: anchorPitch(tomModel, { tensionNPerM, fundamentalHz: tomModel.fundamentalHz(tensionNPerM) }),
  }
}
