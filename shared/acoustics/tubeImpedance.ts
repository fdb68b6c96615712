interface Complex { re: number, im: number }

const multiply = (a: Complex, b: Complex): Complex => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re })
const divide = (a: Complex, b: Complex): Complex => {
  const size = b.re * b.re + b.im * b.im
  return { re: (a.re * b.re + a.im * b.im) / size, im: (a.im * b.re - a.re * b.im) / size }
}

function squareRoot(z: Complex): Complex {
  const size = Math.hypot(z.re, z.im)
  const re = Math.sqrt((size + z.re) / 2)
  const im = Math.sqrt((size - z.re) / 2)
  return { re, im: z.im < 0 ? -im : im }
}

/** sinh and cosh times exp(-|Re z|), so that neither overflows; their ratio is exact. */
function scaledHyperbolic(z: Complex): { sinh: Complex, cosh: Complex, scale: number } {
  const x = Math.abs(z.re)
  const small = Math.exp(-2 * x)
  const cosh = { re: (1 + small) / 2 * Math.cos(z.im), im: Math.sign(z.re || 1) * (1 - small) / 2 * Math.sin(z.im) }
  const sinh = { re: Math.sign(z.re || 1) * (1 - small) / 2 * Math.cos(z.im), im: (1 + small) / 2 * Math.sin(z.im) }
  return { sinh, cosh, scale: Math.exp(-x) }
}

export interface TubeImpedanceOptions {
  /** Zero of J_m' of the cross mode; 0 for the plane wave. */
  b: number
  /** Length by radius, end correction included, > 0. */
  length: number
  closed: boolean
  /** omega R / c0, >= 0. */
  kappa0: number
  /** Loss factor eta: kappa0^2 becomes kappa0^2 (1 - i eta). */
  lossFactor: number
  /** Resonances to leave out: weight / (kappa^2 - kappa0^2) each. */
  taken: ReadonlyArray<{ kappa: number, weight: number, otherSign: 1 | -1 }>
}

/** Real parts only: the loss factor is there to keep resonances finite, not to say how much the air takes away. */
export interface TubeImpedance { own: number, cross: number }

/**
 * Mass that one cross mode of a tube puts on a piston of its own shape, by rho0 R, and on the one at the far end.
 *
 *   k^2 = b^2 - kappa0^2 (1 - i eta);  open: tanh(k l)/k;  closed: coth(k l)/k;  far end, same way: -1/(k sinh(k l))
 *
 * The closed plane wave's spring -1/(l kappa0^2) (far end +1/(l kappa0^2)) and the resonances in `taken` are left out.
 * Source: Morse & Ingard, Theoretical Acoustics, ch. 9 (tubes); Fletcher & Rossing ch. 8.
 */
export function tubeImpedance(options: TubeImpedanceOptions): TubeImpedance {
  const { b, length, closed, lossFactor, taken } = options
  // At kappa0 = 0 the plane wave's terms are differences of infinite ones: take them a little beside it.
  const kappa0 = Math.max(options.kappa0, 0.02)
  const air: Complex = { re: kappa0 * kappa0, im: -lossFactor * kappa0 * kappa0 }
  const k = squareRoot({ re: b * b - air.re, im: -air.im })
  const { sinh, cosh, scale } = scaledHyperbolic({ re: k.re * length, im: k.im * length })
  const own = closed ? divide(cosh, multiply(k, sinh)) : divide(sinh, multiply(k, cosh))
  const cross = closed ? divide({ re: -scale, im: 0 }, multiply(k, sinh)) : { re: 0, im: 0 }
  if (closed && b === 0) {
    const spring = divide({ re: 1 / length, im: 0 }, air)
    own.re += spring.re
    own.im += spring.im
    cross.re -= spring.re
    cross.im -= spring.im
  }
  for (const resonance of taken) {
    const term = divide({ re: resonance.weight, im: 0 }, { re: resonance.kappa ** 2 - air.re, im: -air.im })
    own.re -= term.re
    own.im -= term.im
    cross.re -= resonance.otherSign * term.re
    cross.im -= resonance.otherSign * term.im
  }
  return { own: own.re, cross: cross.re }
}
