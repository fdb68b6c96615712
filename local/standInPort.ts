import { ensurePort } from './ports'

/** The port that a stand-in had before, by STAND_IN_PORT, when it is free: addresses stay the same over restarts. */
export function standInPort(name = 'STAND_IN_PORT'): Promise<number> {
  return ensurePort(Number(process.env[name]) || undefined)
}
