/**
 * How rods act on the rim: an elastic ring (the hoop) on the film's own stiffness, pulled by springy rods.
 *
 * Film stiffness by harmonic k of the rim's radial displacement, N/m per m:
 *   K_0 = E h / ((1 - nu) R),  K_1 = 0 (the head only tilts),  K_k = E h (k^2 - 1) / (R (2k - 1 + nu)) for k >= 2
 * Hoop out of its plane, bending EI with torsion GJ, N/m per m:
 *   B_k = (EI / R^4) k^2 (k^2 - 1)^2 / (k^2 + EI/GJ)
 * With n rods, each rod pattern q (0 to n - 1) gathers the harmonics k = q, q +- n, ...:
 *   c_q = n / (2 pi R) * sum_k 1 / (K_k + B_k);  tension per turn g_q = p n / (2 pi R) * K_q / (K_q + B_q) / (s + c_q)
 * where p is the thread pitch and s the give of rod and shell, set so that g_0 = kappa K_0 p. Pattern q = 1 tilts the hoop
 * and pulls nothing.
 * Sources: film: Timoshenko & Goodier, Theory of Elasticity, ch. 4 (Airy function of a disc); ring: Timoshenko, Strength
 * of Materials II, ch. 4 (ring bent out of its plane).
 */

export interface RodKernelOptions {
  rodCount: number
  /** R, vibrating radius, m. */
  radiusM: number
  /** E h of all plies, N/m. */
  filmStiffnessNPerM: number
  poisson: number
  /** p, advance of a rod a turn, m. */
  threadPitchM: number
  /** Share of the ideal rise per turn, 0 to 1. */
  kappa: number
}

/** A pressed steel hoop, from its section: 1.6 mm sheet, 38 mm high, 55 mm around its bends (E 200, G 80 GPa; an estimate, learning corrects the mean). */
const HOOP_BENDING_NM2 = 1460
const HOOP_TORSION_NM2 = 6
/** Beyond this the hoop holds still: B_k grows as k^4. */
const HARMONICS = 60

/** K_0 p: rise of mean tension per turn of every rod if nothing but the film gave way, N/m a turn. Source: physics of a disc under equal edge stretch, T = E h / (1 - nu) * strain. */
export function idealRisePerTurn(options: Omit<RodKernelOptions, 'kappa' | 'rodCount'>): number {
  return filmStiffness(options, 0) * options.threadPitchM
}

function filmStiffness({ filmStiffnessNPerM, radiusM, poisson }: Pick<RodKernelOptions, 'filmStiffnessNPerM' | 'radiusM' | 'poisson'>, k: number): number {
  if (k === 0) return filmStiffnessNPerM / ((1 - poisson) * radiusM)
  return filmStiffnessNPerM * (k * k - 1) / (radiusM * (2 * k - 1 + poisson))
}

function hoopStiffness(radiusM: number, k: number): number {
  return HOOP_BENDING_NM2 / radiusM ** 4 * k * k * (k * k - 1) ** 2 / (k * k + HOOP_BENDING_NM2 / HOOP_TORSION_NM2)
}

/** Rise of tension per turn for each rod pattern q, N/m a turn: the eigenvalues of the circulant kernel. */
export function kernelSpectrum(options: RodKernelOptions): number[] {
  const { rodCount: n, radiusM, threadPitchM, kappa } = options
  const perRod = n / (2 * Math.PI * radiusM)
  const compliance = (q: number) => {
    let sum = 0
    for (let k = -HARMONICS; k <= HARMONICS; k++) {
      if (Math.abs(k) !== 1 && (k - q) % n === 0) sum += 1 / (filmStiffness(options, Math.abs(k)) + hoopStiffness(radiusM, Math.abs(k)))
    }
    return perRod * sum
  }
  // The film between rods gives a little too; below 0 the prior kappa would ask for rods stiffer than rigid.
  const give = Math.max(0, perRod / (kappa * filmStiffness(options, 0)) - compliance(0))
  return Array.from({ length: n }, (_, q) => {
    const k = Math.min(q, n - q)
    if (k === 0) return kappa * filmStiffness(options, 0) * threadPitchM
    if (k === 1) return 0
    const film = filmStiffness(options, k)
    return threadPitchM * perRod * film / (film + hoopStiffness(radiusM, k)) / (give + compliance(k))
  })
}

/** First row of the circulant G: rise at rod i per turn of rod j is G[|i - j|], N/m a turn. */
export function rodKernel(options: RodKernelOptions): number[] {
  const spectrum = kernelSpectrum(options)
  const n = options.rodCount
  return spectrum.map((_, d) => spectrum.reduce((sum, g, q) => sum + g * Math.cos(2 * Math.PI * q * d / n), 0) / n)
}
