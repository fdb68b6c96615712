import { readlinkSync } from 'node:fs'
import { setPriority } from 'node:os'

/** Argument of a thread that is to go behind the server's own. */
export const BEHIND = '--behind'
const NICENESS = 10

/**
 * Lets the server's own thread, which answers every request, go before this one where both want a core, if this one was
 * started so. Linux keeps a priority for each thread; elsewhere, or where it may not be set, threads stay as they are.
 */
export function lowerPriority(): void {
  if (!process.argv.includes(BEHIND)) return
  try {
    setPriority(Number(readlinkSync('/proc/thread-self').split('/').at(-1)), NICENESS)
  } catch {
    // No such system: nothing depends on it but how soon other requests are answered.
  }
}
