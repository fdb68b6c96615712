import type { DrumModel } from '../../../shared/acoustics'
import { DomainError } from '../core/errors'

/** The pitch of a head at a tension and back, held to what this very reading measured. */
export interface AnchoredPitch {
  fundamentalHz: (tensionNPerM: number) => number
  /** Frequency of (1,1), what a kettle is tuned by. */
  principalHz: (tensionNPerM: number) => number
  /** @throws DomainError bad-input where no tension of this head gives that pitch */
  tensionFor: (hz: number, of: 'fundamental' | 'principal') => number
}

export interface Anchor { tensionNPerM: number, fundamentalHz: number, principalHz?: number }

/** Factor on the reading's tension, up and down: two octaves each way, further than any film goes. */
const SPAN = 16

/**
 * The model's pitch of each mode is scaled by measured over predicted at the reading's own tension, so that a turn sheet
 * starts from what was heard: what the model misses of the drum's air is the same before and after a few turns.
 *
 * Two heads share two (0,1) modes, one with the heads moving the same way and one against each other; which head moves more
 * in which changes with the tensions. The one that was heard is followed by its place in the order of frequencies, which
 * never jumps.
 * @param otherTensionNPerM  the other head of a double-headed drum stays as it is
 */
export function anchorPitch(model: DrumModel, anchor: Anchor, otherTensionNPerM?: number): AnchoredPitch {
  const other = otherTensionNPerM ?? anchor.tensionNPerM
  const twoHeads = model.options.geometry.construction === 'double-headed'
  const branches = (tension: number) => axisymmetricHz(model, tension, other).slice(0, twoHeads ? 2 : 1)
  const distance = (hz: number) => Math.abs(Math.log(hz / anchor.fundamentalHz))
  const atAnchor = branches(anchor.tensionNPerM)
  const branch = atAnchor.findIndex(hz => distance(hz) === Math.min(...atAnchor.map(distance)))
  const fundamental = (tension: number) => branches(tension)[branch]!
  const principal = (tension: number) => {
    const modes = model.predictModes({ tensionNPerM: tension, otherTensionNPerM: other, nodalDiameters: [1] })
    return (modes.find(mode => mode.n === 1 && mode.head === 'struck') ?? modes[0])!.frequencyHz
  }
  const scaled = (predict: (tension: number) => number, measuredHz: number | undefined) => {
    const scale = measuredHz === undefined ? 1 : measuredHz / predict(anchor.tensionNPerM)
    return (tension: number) => scale * predict(tension)
  }
  const fundamentalHz = scaled(fundamental, anchor.fundamentalHz)
  const principalHz = scaled(principal, anchor.principalHz)
  return {
    fundamentalHz,
    principalHz,
    tensionFor: (hz, of) => invert(of === 'principal' ? principalHz : fundamentalHz, hz, anchor.tensionNPerM, twoHeads ? ' Tune the other head towards it first.' : ''),
  }
}

/** Frequencies of the film's m = 0 modes, lowest first, Hz. */
function axisymmetricHz(model: DrumModel, tensionNPerM: number, otherTensionNPerM: number): number[] {
  return model.predictModes({ tensionNPerM, otherTensionNPerM, nodalDiameters: [0] }).filter(mode => mode.n >= 1).map(mode => mode.frequencyHz)
}

/** Bisection on ln T over a wide span around the reading; pitch rises with tension. */
function invert(pitch: (tension: number) => number, hz: number, near: number, hint: string): number {
  let low = near / SPAN
  let high = near * SPAN
  const [lowest, highest] = [pitch(low), pitch(high)]
  if (hz <= lowest || hz >= highest) {
    throw new DomainError('bad-input', `This head cannot reach ${hz.toFixed(1)} Hz: it sounds between ${lowest.toFixed(0)} and ${highest.toFixed(0)} Hz at any tension while everything else stays as it is.${hint}`, [{ path: 'target.hz', message: 'Out of this head\'s reach.' }])
  }
  // 40 halvings of ln(16^2): below a billionth.
  for (let i = 0; i < 40; i++) {
    const middle = Math.sqrt(low * high)
    if (pitch(middle) < hz) low = middle
    else high = middle
  }
  return Math.sqrt(low * high)
}
