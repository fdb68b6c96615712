import type { Migration } from 'kysely'
import * as start from './20261201_0001_start'
import * as rereading from './20261201_0002_rereading'

/** In order; frozen once merged. Listed statically so that the same list runs under tsx, in tests and in the built server. */
export const migrations: Record<string, Migration> = {
  '20261201_0001_start': start,
  '20261201_0002_rereading': rereading,
}
