import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { writeWhole } from './files'
import { lockFolder, LockedError } from './lock'

// What the built app is made from. Tests, scripts and the stand-ins are not in it.
const SOURCES = ['app', 'server', 'shared', 'db', 'build', 'public', 'nuxt.config.ts', 'tailwind.config.ts', 'package.json', 'package-lock.json']
// db/seed runs from its sources.
const LEFT_OUT = ['db/seed']

/** Content of all that the build is made from, as one hash. */
export function fingerprintSources(root: string): string {
  const hash = createHash('sha256').update(process.version)
  const add = (path: string) => {
    if (LEFT_OUT.includes(path)) return
    const full = join(root, path)
    if (!existsSync(full)) return
    const entries = readdirSync(full, { withFileTypes: true }).sort((a, b) => a.name < b.name ? -1 : 1)
    for (const entry of entries) {
      const inner = `${path}/${entry.name}`
      if (entry.isDirectory()) add(inner)
      else addFile(inner)
    }
  }
  const addFile = (path: string) => {
    if (!existsSync(join(root, path))) return
    hash.update(`${path}\0`).update(readFileSync(join(root, path)))
  }
  for (const source of SOURCES) if (source.includes('.')) addFile(source)
  else add(source)
  return hash.digest('hex')
}

/** True when .output was built from the sources as they are. */
export function isBuilt(root: string, fingerprint = fingerprintSources(root)): boolean {
  return existsSync(join(root, '.output/server/index.mjs')) && existsSync(stampFile(root)) && readFileSync(stampFile(root), 'utf8') === fingerprint
}

/**
 * Builds the app unless that has been done. One build at a time in a folder; a second caller waits for the first.
 * @param started told of the build's process, to end it on a signal
 */
export async function ensureBuilt(root: string, started: (pid: number | undefined) => void = () => undefined): Promise<void> {
  if (isBuilt(root)) return
  const lock = await waitForLock(root)
  try {
    const fingerprint = fingerprintSources(root)
    if (isBuilt(root, fingerprint)) return
    console.log('Building the app (about a minute)')
    await build(root, started)
    await writeWhole(stampFile(root), fingerprint, 0o644)
  } finally {
    await lock.release()
  }
}

function stampFile(root: string): string {
  return join(root, '.output/built-from')
}

async function waitForLock(root: string) {
  for (;;) {
    try {
      return await lockFolder(root, 'build')
    } catch (error) {
      if (!(error instanceof LockedError)) throw error
      await new Promise(resolve => setTimeout(resolve, 500))
    }
  }
}

function build(root: string, started: (pid: number | undefined) => void): Promise<void> {
  return new Promise((resolve, reject) => {
    let text = ''
    const keep = (chunk: Buffer) => text = (text + chunk.toString()).slice(-200_000)
    const child = spawn(process.execPath, [join(root, 'node_modules/nuxt/bin/nuxt.mjs'), 'build'], {
      cwd: root,
      env: { ...process.env, NODE_ENV: 'production', NUXT_TELEMETRY_DISABLED: '1', CI: '1' },
      stdio: ['ignore', 'pipe', 'pipe'],
      detached: true,
    })
    started(child.pid)
    child.stdout.on('data', keep)
    child.stderr.on('data', keep)
    child.once('error', reject)
    child.once('close', (code) => {
      started(undefined)
      if (code === 0) resolve()
      else reject(new Error(`The build failed:\n${errorLines(text)}`))
    })
  })
}

/** The bundler says what is wrong, then lists hundreds of files: what counts stands at the first error. */
function errorLines(output: string): string {
  const lines = output.trimEnd().split('\n')
  const first = lines.findIndex(line => /error/i.test(line))
  if (first < 0) return lines.slice(-30).join('\n')
  const list = lines.findIndex((line, index) => index > first && line.includes('watchFiles:'))
  return lines.slice(first, list < 0 ? first + 30 : Math.min(list, first + 30)).join('\n')
}
