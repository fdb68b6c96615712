import { existsSync, readdirSync } from 'node:fs'
import { join } from 'node:path'

const DEBIAN_ROOT = '/usr/lib/postgresql'

/**
 * Folder of PostgreSQL's server programs as Debian installs them.
 * @param version major version that a data folder was made with; without it the newest installed
 * @throws Error when there is none, or none of that version
 */
export function findPostgresBin(version?: string): string {
  const installed = existsSync(DEBIAN_ROOT)
    ? readdirSync(DEBIAN_ROOT).filter(v => existsSync(join(DEBIAN_ROOT, v, 'bin/initdb'))).sort((a, b) => Number(b) - Number(a))
    : []
  if (version === undefined) {
    if (!installed[0]) throw new Error('PostgreSQL is not installed: apt-get install postgresql')
    return join(DEBIAN_ROOT, installed[0], 'bin')
  }
  if (!installed.includes(version)) {
    throw new Error(`The data folder was made by PostgreSQL ${version}, which is not installed: apt-get install postgresql-${version}, or upgrade the folder with pg_upgrade.`)
  }
  return join(DEBIAN_ROOT, version, 'bin')
}
