import { readlinkSync } from 'node:fs'
import { setPriority } from 'node:os'

const NICENESS = 10

/**
 * Lets the server's own thread, which answers every request, go before this one where both want a core. Linux keeps a
 * priority for each thread; elsewhere, or where it may not be set, threads stay as they are.
 */
export function lowerPriority(): void {
  try {
    setPriority(Number(readlinkSync('/proc/thread-self').split('/').at(-1)), NICENESS)
  } catch {
    // No such system: nothing depends on it but how soon other requests are answered.
  }
}
