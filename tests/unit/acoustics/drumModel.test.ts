import { describe, expect, it } from 'vitest'
import { airAt, createDrumModel, idealFrequencyHz, type DrumGeometry, type HeadFilm, type PredictedMode } from '../../../shared/acoustics'
import reference from '../../reference/acoustics.json'

const film: HeadFilm = { plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, yieldPa: 100e6, arealDensityKgM2: 0.3475 }
const air = airAt({ temperatureC: 20 })
const geometries: DrumGeometry[] = [
  { construction: 'fixture', radiusM: 0.165, depthM: 0 },
  { construction: 'frame', radiusM: 0.165, depthM: 0 },
  { construction: 'open', radiusM: 0.165, depthM: 0.2 },
  { construction: 'kettle', radiusM: 0.325, depthM: 0, bowlVolumeM3: 0.14 },
  { construction: 'double-headed', radiusM: 0.165, depthM: 0.2 },
]
const find = (modes: PredictedMode[], m: number, n: number, head = 'struck') => modes.find(mode => mode.m === m && mode.n === n && mode.head === head)!

describe('ideal membrane', () => {
  it('has the published ratios to its lowest mode', () => {
    const head = { radiusM: 0.2, arealDensityKgM2: 0.3, tensionNPerM: 2000 }
    const published: Array<[number, number, number]> = [[1, 1, 1.593], [2, 1, 2.136], [0, 2, 2.295], [3, 1, 2.653], [1, 2, 2.917], [4, 1, 3.155], [2, 2, 3.5], [0, 3, 3.598], [5, 1, 3.648]]
    for (const [m, n, ratio] of published) {
      // Source: Fletcher & Rossing ch. 3, table of circular membrane ratios, three decimals.
      expect(Math.abs(idealFrequencyHz(head, m, n) / idealFrequencyHz(head, 0, 1) - ratio)).toBeLessThan(1.1e-3) // printed values are partly cut, not rounded
    }
  })

  it('refuses a negative radius', () => {
    expect(() => idealFrequencyHz({ radiusM: -1, arealDensityKgM2: 0.3, tensionNPerM: 2000 }, 0, 1)).toThrow(RangeError)
  })
})

describe('modes with air', () => {
  for (const drum of reference.drums) {
    const { construction, radiusM, depthM, tensionNPerM } = drum.case
    const bowlVolumeM3 = 'bowlVolumeM3' in drum.case ? drum.case.bowlVolumeM3 : undefined
    const otherTensionNPerM = 'otherTensionNPerM' in drum.case ? drum.case.otherTensionNPerM : undefined
    const model = createDrumModel({ geometry: { construction: construction as DrumGeometry['construction'], radiusM, depthM, bowlVolumeM3 }, film, air: reference.air })
    const modes = model.predictModes({ tensionNPerM, otherTensionNPerM })
    for (const [m, roots] of Object.entries(drum.roots)) {
      it(`of a ${construction} head, m = ${m}, stand at the roots of its equation of motion`, () => {
        // Source: scipy, roots of det(K - omega^2 M(omega)) by a scan in omega (tests/reference/acoustics.py).
        const heads = modes.filter(mode => mode.m === Number(m) && mode.frequencyHz < (construction === 'kettle' ? 410 : 580))
        for (const mode of heads) {
          const nearest = Math.min(...roots.map(root => Math.abs(root / mode.losslessHz - 1)))
          expect(nearest).toBeLessThan(2e-3) // the reference's air has no losses; ours blunts the weak resonances
        }
        expect(heads.length).toBeGreaterThan(0)
      })
    }
  }

  it('follow all lengths: twice the drum with twice the film at twice the tension sounds an octave lower', () => {
    for (const geometry of geometries) {
      const small = createDrumModel({ geometry, film, air, edgeFactor: 0 })
      const large = createDrumModel({
        geometry: { ...geometry, radiusM: 2 * geometry.radiusM, depthM: 2 * geometry.depthM, bowlVolumeM3: geometry.bowlVolumeM3 === undefined ? undefined : 8 * geometry.bowlVolumeM3 },
        film: { ...film, plyThicknessM: 2 * film.plyThicknessM, arealDensityKgM2: 2 * film.arealDensityKgM2 }, air, edgeFactor: 0,
      })
      const a = small.predictModes({ tensionNPerM: 2500, maxHz: 700 })
      const b = large.predictModes({ tensionNPerM: 5000, maxHz: 350 })
      expect(b.length).toBe(a.length)
      a.forEach((mode, i) => expect(b[i]!.frequencyHz * 2 / mode.frequencyHz).toBeCloseTo(1, 8)) // exact by dimensions: rounding of the iteration
    }
  })

  it('lie below the ideal ones by the added mass and approach them as the air thins', () => {
    const geometry = geometries[0]!
    const limp = { ...film, plyThicknessM: 1e-6 }
    const thin = createDrumModel({ geometry, film: limp, air: { ...air, densityKgM3: 1e-6 }, edgeFactor: 0 }).predictModes({ tensionNPerM: 3000 })
    for (const mode of thin.slice(0, 12)) expect(mode.frequencyHz / mode.idealHz).toBeCloseTo(1, 5) // what air is left weighs 1e-6 of the film
    const thick = createDrumModel({ geometry, film, air }).predictModes({ tensionNPerM: 3000 })
    for (const mode of thick.slice(0, 12)) expect(mode.frequencyHz).toBeLessThan(mode.idealHz)
  })

  it('of a kettle stand near 2 : 3 : 4 : 5', () => {
    const mylar = { ...film, plyThicknessM: 190e-6, arealDensityKgM2: 0.262 }
    const modes = createDrumModel({ geometry: geometries[3]!, film: mylar, air }).predictModes({ tensionNPerM: 4500, maxHz: 700 })
    const principal = find(modes, 1, 1).frequencyHz
    // Source: from memory of Fletcher & Rossing ch. 18: 1 : 1.50 : 1.97 : 2.44 : 2.90.
    const published = [1.5, 1.97, 2.44, 2.9]
    published.forEach((ratio, i) => {
      expect(Math.abs(find(modes, i + 2, 1).frequencyHz / principal / ratio - 1)).toBeLessThan(0.03) // kettles differ by 2 to 3 % among themselves
    })
  })

  it('of two heads do not care which head is called the struck one', () => {
    const model = createDrumModel({ geometry: geometries[4]!, film, air })
    const one = model.predictModes({ tensionNPerM: 2000, otherTensionNPerM: 2700, maxHz: 700 })
    const two = model.predictModes({ tensionNPerM: 2700, otherTensionNPerM: 2000, maxHz: 700 })
    expect(two.map(mode => mode.losslessHz.toFixed(6))).toEqual(one.map(mode => mode.losslessHz.toFixed(6)))
    expect(find(two, 2, 1, 'other').losslessHz).toBeCloseTo(find(one, 2, 1).losslessHz, 6) // the same root: iteration's rounding
  })

  it('of two heads split the (0,1) into both moving together, low, and against each other, high', () => {
    const modes = createDrumModel({ geometry: geometries[4]!, film, air }).predictModes({ tensionNPerM: 2500, otherTensionNPerM: 2500, nodalDiameters: [0] })
    const [low, high] = modes.filter(mode => mode.n === 1)
    expect(low!.struckShape[0]! * low!.otherShape[0]!).toBeGreaterThan(0)
    expect(high!.struckShape[0]! * high!.otherShape[0]!).toBeLessThan(0)
    expect(high!.frequencyHz).toBeGreaterThan(1.2 * low!.frequencyHz)
  })

  it('rise with tension and are found again from the fundamental', () => {
    for (const geometry of geometries) {
      const model = createDrumModel({ geometry, film, air })
      const hz = model.fundamentalHz(2400, 2100)
      expect(model.tensionForFundamental(hz, 2100) / 2400).toBeCloseTo(1, 7) // bisection stops at 1e-10
    }
  })

  it('say how they follow tension, air, mass and edge', () => {
    for (const geometry of geometries) {
      const model = createDrumModel({ geometry, film, air })
      const at = (t: number, other: number, s: number, edge: number) =>
        model.predictModes({ tensionNPerM: t, otherTensionNPerM: other, airScale: { axisymmetric: s, others: s }, edgeFactor: edge, maxHz: 600 })
      const base = at(2400, 2900, 1, 0.5)
      const e = 1e-4
      const slope = (up: PredictedMode[], down: PredictedMode[], mode: PredictedMode) =>
        Math.log(find(up, mode.m, mode.n, mode.head).losslessHz / find(down, mode.m, mode.n, mode.head).losslessHz) / (2 * e)
      const t = [at(2400 * Math.exp(e), 2900, 1, 0.5), at(2400 * Math.exp(-e), 2900, 1, 0.5)] as const
      const o = [at(2400, 2900 * Math.exp(e), 1, 0.5), at(2400, 2900 * Math.exp(-e), 1, 0.5)] as const
      const s = [at(2400, 2900, Math.exp(e), 0.5), at(2400, 2900, Math.exp(-e), 0.5)] as const
      const c = [at(2400, 2900, 1, 0.5 + e), at(2400, 2900, 1, 0.5 - e)] as const
      for (const mode of base) {
        // Central differences of the prediction itself: their own error is e^2 and the table's interpolated slope.
        expect(slope(...t, mode)).toBeCloseTo(mode.sensitivity.lnTension, 3) // interpolated slope of the air table
        expect(slope(...o, mode)).toBeCloseTo(mode.sensitivity.lnOtherTension, 3) // interpolated slope of the air table
        expect(slope(...s, mode)).toBeCloseTo(mode.sensitivity.lnAirScale, 3) // interpolated slope of the air table
        expect(slope(...c, mode)).toBeCloseTo(mode.sensitivity.edgeFactor, 4) // small numbers: a tenth of a percent of f
      }
    }
  })

  it('refuse a kettle without a volume and a tension of nothing', () => {
    expect(() => createDrumModel({ geometry: { construction: 'kettle', radiusM: 0.3, depthM: 0 }, film, air })).toThrow(RangeError)
    expect(() => createDrumModel({ geometry: geometries[0]!, film, air }).predictModes({ tensionNPerM: 0 })).toThrow(RangeError)
    expect(() => createDrumModel({ geometry: { ...geometries[0]!, radiusM: -0.1 }, film, air })).toThrow(RangeError)
  })
})
