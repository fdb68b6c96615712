/** Modes, unevenness and sound of the simulated drum against limits that are known without it. */
import { describe, expect, it } from 'vitest'
import { simulateTap, solveDrum } from '../../support/drum'
import type { SimDrum, SimHead, SimTap } from '../../support/drum'
import { airMatrix } from '../../support/drum/modes'
import { c, div, exp, mul, scale, solveComplex } from '../../support/drum/complex'
import { mixedModes } from '../../support/drum/unevenness'

const film: SimHead = { tensionNPerM: 3000, plies: 1, plyThicknessM: 250e-6, filmDensityKgM3: 1390, modulusPa: 4.5e9, poisson: 0.38, arealDensityKgM2: 0.3475 }
const limp: SimHead = { ...film, modulusPa: 1 }
const vacuum = (more: Partial<SimDrum> = {}): SimDrum => ({ construction: 'fixture', radiusM: 0.1651, depthM: 0, batter: limp, edgeTerm: 0, pressurePa: 1e-4, ...more })
const hz = (drum: SimDrum, m: number, n: number): number =>
  solveDrum(drum, 1500).roots.find(root => root.m === m && root.n === n)!.omega / (2 * Math.PI)

/** Lowest eigenvalues of -u'' - u'/r + m^2 u/r^2 on a unit disc by central differences on `cells` cells. */
function differenceRoot(m: number, cells: number, low: number, high: number): number {
  const h = 1 / (cells + 0.5)
  const count = (k: number): number => {
    // Sturm count of the symmetrised tridiagonal matrix on nodes r_i = (i + 1/2) h.
    let negative = 0
    let d = 1
    for (let i = 0; i < cells; i++) {
      const r = (i + 0.5) * h
      const off = i === 0 ? 0 : (i * h) / (h * h * Math.sqrt(r * (r - h)))
      d = (2 / (h * h) + m * m / (r * r) - k * k) - off * off / d
      if (d < 0) negative++
    }
    return negative
  }
  let [a, b] = [low, high]
  const start = count(low)
  for (let i = 0; i < 50; i++) {
    const mid = (a + b) / 2
    if (count(mid) > start) b = mid
    else a = mid
  }
  return a
}

describe('modes of the simulated drum', () => {
  it('are those of an ideal membrane in a vacuum', () => {
    const base = hz(vacuum(), 0, 1)
    expect(base).toBeCloseTo(2.404826 / (2 * Math.PI * 0.1651) * Math.sqrt(3000 / 0.3475), 3) // Fletcher & Rossing ch. 3; zero to 7 digits
    // Ratios: Fletcher & Rossing ch. 3, three decimals as printed.
    for (const [m, n, ratio] of [[1, 1, 1.593], [2, 1, 2.136], [0, 2, 2.295], [3, 1, 2.653], [1, 2, 2.917], [4, 1, 3.155]] as const) {
      expect(hz(vacuum(), m, n) / base).toBeCloseTo(ratio, 2.9) // printed to three decimals
    }
  })

  it('agree with finite differences on a disc in a vacuum', () => {
    const speed = Math.sqrt(3000 / 0.3475) / (2 * Math.PI * 0.1651)
    for (const [m, n, low, high] of [[0, 1, 1.5, 3], [1, 1, 3, 5], [2, 1, 4, 6], [0, 2, 4.5, 6.5]] as const) {
      const coarse = differenceRoot(m, 150, low, high)
      const fine = differenceRoot(m, 300, low, high)
      const limit = fine + (fine - coarse) / 3
      expect(hz(vacuum(), m, n) / (limit * speed)).toBeCloseTo(1, 4) // second-order scheme, extrapolated: some 1e-5
    }
  })

  it('rise with bending stiffness by D k^2/(2 T)', () => {
    const stiff = vacuum({ batter: film })
    const d = 4.5e9 * 250e-6 ** 3 / (12 * (1 - 0.38 ** 2))
    const k = 3.8317 / 0.1651
    expect(hz(stiff, 1, 1) / hz(vacuum(), 1, 1) - 1).toBeCloseTo(d * k * k / (2 * 3000), 6) // first order in 1e-3
  })

  it('put a kettle into the near-harmonic row 2 : 3 : 4 : 5', () => {
    const kettle: SimDrum = { construction: 'kettle', radiusM: 0.328, depthM: 0, bowlVolumeM3: 0.14, batter: { ...film, plyThicknessM: 190e-6, arealDensityKgM2: 0.264, tensionNPerM: 3990 } }
    const f = [1, 2, 3, 4].map(m => hz(kettle, m, 1))
    // From memory of Fletcher & Rossing ch. 18: 1 : 1.50 : 1.97 : 2.44, instruments differ by a percent or two.
    expect(f[1]! / f[0]!).toBeCloseTo(1.5, 1.2)
    expect(f[2]! / f[0]!).toBeCloseTo(1.97, 1.2)
    expect(f[3]! / f[0]!).toBeCloseTo(2.44, 1.2)
  })

  it('couple two equal heads into a pair that moves alike and a stiffer one that does not', () => {
    const drum: SimDrum = { construction: 'double-headed', radiusM: 0.1651, depthM: 0.15, batter: film, resonant: film }
    const roots = solveDrum(drum, 600).roots.filter(root => root.m === 0 && root.n === 1)
    expect(roots).toHaveLength(2)
    const [low, high] = roots.sort((a, b) => a.omega - b.omega)
    expect(low!.shape[0]!.re * low!.shape[7]!.re).toBeGreaterThan(0)
    expect(high!.shape[0]!.re * high!.shape[7]!.re).toBeLessThan(0)
    expect(high!.omega / low!.omega).toBeGreaterThan(1.3)
  })
})

describe('the ring of the simulated drum', () => {
  it('is the inverse transform of its response at real frequencies, strong radiation included', () => {
    // The complex poles come from continuing the air's tables; this checks them without continuation.
    const drum: SimDrum = { construction: 'fixture', radiusM: 0.1651, depthM: 0, batter: film }
    const model = solveDrum(drum, 1500)
    const top = 1500
    const response: { re: number, im: number }[] = []
    for (let f = 0; f <= top; f++) {
      const w = 2 * Math.PI * (f + 1e-9)
      const a = airMatrix(model, 0, c(w / model.sound))
      for (let e = 0; e < a.re.length; e++) {
        a.re[e]! *= -w * w
        a.im[e]! *= -w * w
      }
      model.films[0]!.stiffness[0]!.forEach((k, n) => {
        a.re[n * (a.n + 1)]! += k - w * w * film.arealDensityKgM2
      })
      response.push(solveComplex(a, Array.from({ length: a.n }, (_, i) => c(i === 0 ? 1 : 0)))[0]!)
    }
    const first = 2 * Math.PI * 150
    for (const t of [0.01, 0.017, 0.025, 0.04]) {
      let inverse = 0
      response.forEach((x, f) => {
        const taper = f < 900 ? 1 : Math.cos(Math.PI / 2 * (f - 900) / (top - 900)) ** 2
        inverse += 2 * taper * (x.re * Math.cos(2 * Math.PI * f * t) + x.im * Math.sin(2 * Math.PI * f * t)) * (f === 0 ? 0.5 : 1)
      })
      let modal = 0
      for (const root of model.roots.filter(r => r.m === 0)) {
        const square = mul(root.shape[0]!, root.shape[0]!)
        const residue = div(mul(c(0, 1), square), c(root.omega, -root.gamma))
        modal += mul(residue, exp(mul(c(0, -1), scale(c(root.omega, -root.gamma), t)))).re
      }
      // One part in a hundred of the first mode's start (1/(m w)); the truncated grid of 1 Hz up to 1.5 kHz leaves that.
      expect(Math.abs(inverse - modal) * first * 0.6).toBeLessThan(0.01)
    }
  })
})

describe('an uneven simulated head', () => {
  const split = (k: number, m: number): number => {
    const model = solveDrum(vacuum({ unevenness: [{ k, ratio: 0.02, phaseRad: 0.4 }] }), 700)
    const pair = mixedModes(model, 700).filter(mode => mode.leading.root.m === m && mode.leading.root.n === 1).map(mode => mode.omega)
    expect(pair).toHaveLength(2)
    return Math.abs(pair[0]! - pair[1]!) / ((pair[0]! + pair[1]!) / 2)
  }

  it('splits (m,1) by the harmonic 2m alone, by (4m-1)/(2(4m^2-1)) of it', () => {
    // Follows from the plane-stress field to first order; second order is some ratio^2 = 4e-4 of the tension.
    for (const m of [1, 2, 3]) expect(split(2 * m, m) / 0.02).toBeCloseTo((4 * m - 1) / (2 * (4 * m * m - 1)), 2.3)
  })

  it('does not split pairs by odd harmonics to first order', () => {
    expect(split(3, 1)).toBeLessThan(4e-4) // second order: ratio^2
  })
})

describe('the sound of the simulated drum', () => {
  const spec: SimTap = {
    drum: { construction: 'frame', radiusM: 0.1651, depthM: 0.05, batter: film },
    strike: { radiusRatio: 0.5 },
    microphone: { radiusRatio: 0.6, heightM: 0.2 },
    recording: { seed: 5, snrDb: 30, ringS: 1.5 },
  }

  it('is the same for the same seed and another for another', () => {
    const a = simulateTap(spec).samples
    const b = simulateTap(spec).samples
    const other = simulateTap({ ...spec, recording: { ...spec.recording, seed: 6 } }).samples
    expect(a).toEqual(b)
    expect(a[100]).not.toBe(other[100])
  })

  it('stands above its noise by the ratio asked for', () => {
    const { samples, sampleRateHz } = simulateTap(spec)
    const quiet = Math.round(0.3 * sampleRateHz)
    const power = (from: number, to: number): number => samples.slice(from, to).reduce((sum, x) => sum + x * x, 0) / (to - from)
    const noise = power(0, quiet)
    const tap = power(quiet, quiet + sampleRateHz / 2) - noise
    expect(10 * Math.log10(tap / noise)).toBeCloseTo(30, 0.5) // 14 400 noise samples: 0.05 dB
  })

  it('rings at the frequencies and decays that its truth states', () => {
    const quietSpec = { ...spec, recording: { ...spec.recording, snrDb: 140 } }
    const { samples, sampleRateHz, truth } = simulateTap(quietSpec)
    const line = truth.modes.find(mode => mode.m === 1 && mode.n === 1)!
    const from = Math.round(0.9 * sampleRateHz)
    // Phase and level of the line at two moments, each under a 0.2 s Hann window.
    const at = (start: number): { phase: number, size: number } => {
      let re = 0
      let im = 0
      const length = Math.round(0.2 * sampleRateHz)
      for (let i = 0; i < length; i++) {
        const w = (1 - Math.cos(2 * Math.PI * (i + 0.5) / length)) * samples[start + i]!
        re += w * Math.cos(2 * Math.PI * line.hz * (start + i) / sampleRateHz)
        im -= w * Math.sin(2 * Math.PI * line.hz * (start + i) / sampleRateHz)
      }
      return { phase: Math.atan2(im, re), size: Math.hypot(re, im) }
    }
    const first = at(from)
    const second = at(from + Math.round(0.2 * sampleRateHz))
    expect(Math.abs(second.phase - first.phase)).toBeLessThan(2 * Math.PI * 0.2 * 0.003) // 3 mHz: other lines leak that much
    expect(Math.log(first.size / second.size) / 0.2).toBeCloseTo(line.gammaPerS, 1) // same leak
  })

  it('starts sharp after a hard strike and settles at rest', () => {
    const hard = simulateTap({ ...spec, strike: { radiusRatio: 0, glide: 0.15 }, recording: { ...spec.recording, snrDb: 100 } })
    const pitch = (from: number, to: number): number => {
      const times: number[] = []
      for (let i = Math.round(from * hard.sampleRateHz); i < to * hard.sampleRateHz; i++) {
        const [x, y] = [hard.samples[i]!, hard.samples[i + 1]!]
        if (x < 0 && y >= 0) times.push((i - x / (y - x)) / hard.sampleRateHz)
      }
      return (times.length - 1) / (times.at(-1)! - times[0]!)
    }
    expect(hard.truth.glideShare).toBeGreaterThan(0.06)
    expect(pitch(0.9, 1.3)).toBeCloseTo(hard.truth.fundamentalHz, 0) // other m = 0 lines, 40 dB down, move a crossing by some 0.05 ms
    expect(pitch(0.36, 0.42)).toBeGreaterThan(hard.truth.fundamentalHz * 1.01)
  })
})
