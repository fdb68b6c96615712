/** The simulated drum of the tests: an independent numerical model that shares no code with the product. */
export { simulateTap } from './simulateTap'
export { simulateRound, rimTension } from './simulateRound'
export { solveDrum } from './modes'
export { writeWav16 } from './wav'
export { seededRandom } from './random'
export type * from './types'
