import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { chown, mkdir } from 'node:fs/promises'
import { join } from 'node:path'

const isRoot = process.getuid?.() === 0

// Nothing of the caller's environment (PGDATA, PGPORT, …) may steer the server.
const CLEAN_ENV = { PATH: '/usr/sbin:/usr/bin:/sbin:/bin', LANG: 'C.UTF-8', LC_ALL: 'C.UTF-8' }

/**
 * Runs a program as the user that owns the cluster: the postgres user when this process is root (PostgreSQL refuses
 * root), else the caller.
 * @throws Error with what it wrote when it fails
 */
export function runAsDatabaseUser(file: string, args: string[]): Promise<void> {
  const command = isRoot ? ['runuser', '-u', 'postgres', '--', file, ...args] : [file, ...args]
  // `pg_ctl start` leaves the server holding its output, so a pipe would never close.
  const output = args[0] === 'start' ? 'ignore' : 'pipe'
  return new Promise((resolve, reject) => {
    let text = ''
    // Detached: Ctrl-C in a terminal must not reach the server before the supervisor has stopped the app.
    const child = spawn(command[0]!, command.slice(1), { cwd: '/', env: CLEAN_ENV, stdio: ['ignore', output, output], detached: true })
    child.stdout?.on('data', chunk => text += chunk.toString())
    child.stderr?.on('data', chunk => text += chunk.toString())
    child.once('error', reject)
    child.once('close', code => code === 0 ? resolve() : reject(new Error(`${file} ended with code ${code}. ${text.trim()}`)))
  })
}

/** Gives files to the user that owns the cluster. */
export async function setDatabaseOwner(...paths: string[]): Promise<void> {
  if (!isRoot) return
  const [uid, gid] = await Promise.all([idOf('-u'), idOf('-g')])
  for (const path of paths) await chown(path, uid, gid)
}

/**
 * Where the cluster of a data folder lives: inside it, or under /var/lib when the postgres user cannot pass through one
 * of its parents (a home folder of mode 700, say).
 */
export async function chooseClusterHome(dataDir: string): Promise<{ home: string, note?: string }> {
  const inside = join(dataDir, 'postgres')
  if (!isRoot) return { home: inside }
  const reachable = await runAsDatabaseUser('test', ['-x', dataDir]).then(() => true, () => false)
  if (reachable) return { home: inside }
  const outside = `/var/lib/rimwright-${createHash('sha256').update(dataDir).digest('hex').slice(0, 12)}`
  await mkdir(outside, { recursive: true })
  await setDatabaseOwner(outside)
  return { home: outside, note: `The postgres user cannot reach ${dataDir}, so the database's files are in ${outside}.` }
}

function idOf(flag: '-u' | '-g'): Promise<number> {
  return new Promise((resolve, reject) => {
    let text = ''
    const child = spawn('id', [flag, 'postgres'], { stdio: ['ignore', 'pipe', 'inherit'] })
    child.stdout.on('data', chunk => text += chunk.toString())
    child.once('error', reject)
    child.once('close', code => code === 0 ? resolve(Number(text)) : reject(new Error('This machine has no user named postgres.')))
  })
}
