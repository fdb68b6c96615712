import { MINUS } from './figures'

const SIXTEENTHS = 16
const WORDS = ['no', 'one', 'two', 'three', 'four', 'five', 'six', 'seven', 'eight', 'nine', 'ten', 'eleven', 'twelve', 'thirteen', 'fourteen', 'fifteen', 'sixteen']

/** Turns as whole sixteenths. */
export function toSixteenths(turns: number): number {
  return Math.round(turns * SIXTEENTHS)
}

/** '+3/16', U+2212 for slackening, '0' where the rod is left. */
export function sixteenths(turns: number): string {
  const parts = toSixteenths(turns)
  return parts === 0 ? '0' : `${parts > 0 ? '+' : MINUS}${Math.abs(parts)}/16`
}

/** False for a sheet that left every rod as it was: no arrow says which way. */
export function isTurned({ meanTurns }: { meanTurns: number }): boolean {
  return Math.abs(meanTurns) >= 0.005
}

/** 'Tighten, clockwise, three sixteenths'. */
export function turnInWords(turns: number): string {
  const parts = toSixteenths(turns)
  if (parts === 0) return 'Leave this rod as it is'
  const size = Math.abs(parts) <= SIXTEENTHS ? WORDS[Math.abs(parts)] : String(Math.abs(parts))
  return `${parts > 0 ? 'Tighten, clockwise' : 'Slacken, anticlockwise'}, ${size} ${Math.abs(parts) === 1 ? 'sixteenth' : 'sixteenths'}`
}

/** Where a rod lies against the one turned before it, for finding it with the key in hand. */
export function fromPrevious(rod: number, previous: number | null, rodCount: number): string {
  if (previous === null) return 'start here'
  const away = Math.min((rod - previous + rodCount) % rodCount, (previous - rod + rodCount) % rodCount)
  if (away * 2 === rodCount) return `straight across from rod ${previous}`
  if (away === 1) return `next to rod ${previous}`
  const clockwise = (rod - previous + rodCount) % rodCount
  return clockwise === away ? `${away} on from rod ${previous}, clockwise` : `${away} back from rod ${previous}, anticlockwise`
}
