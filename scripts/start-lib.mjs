// What the start and test commands share before anything is installed, so: Node's own modules only.
import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

export const root = dirname(dirname(fileURLToPath(import.meta.url)))

/** Debian packages by name, each with the file that shows that it is there. */
const PROBES = {
  'postgresql': () => existsSync('/usr/lib/postgresql') && readdirSync('/usr/lib/postgresql').some(v => existsSync(`/usr/lib/postgresql/${v}/bin/initdb`)),
  'chromium': () => existsSync('/usr/bin/chromium'),
  'sox': () => existsSync('/usr/bin/sox'),
  'espeak-ng': () => existsSync('/usr/bin/espeak-ng'),
  'fluidsynth': () => existsSync('/usr/bin/fluidsynth'),
  'fluid-soundfont-gm': () => existsSync('/usr/share/sounds/sf2/FluidR3_GM.sf2'),
  'sonic-pi-samples': () => existsSync('/usr/share/sonic-pi/samples'),
  'python3-scipy': () => existsSync('/usr/lib/python3/dist-packages/scipy'),
}

const running = new Set()

/**
 * Runs a command in a process group of its own, so that a signal can end it with all that it started.
 * @returns its exit code, or 1 when a signal or the time limit ended it
 */
export function run(command, args, { cwd = root, env = process.env, stdio = ['ignore', 'inherit', 'inherit'], limitMs = 0 } = {}) {
  return new Promise((resolve) => {
    const child = spawn(command, args, { cwd, env, stdio, detached: true })
    running.add(child)
    const timer = limitMs
      ? setTimeout(() => {
          console.error(`${command} ${args.join(' ')} did not end within ${limitMs / 1000} s: ended.`)
          endGroup(child, 'SIGKILL')
        }, limitMs)
      : undefined
    const end = (code) => {
      clearTimeout(timer)
      running.delete(child)
      resolve(code)
    }
    child.once('error', (error) => {
      console.error(`${command}: ${error.message}`)
      end(1)
    })
    child.once('exit', code => end(code ?? 1))
  })
}

function endGroup(child, signal) {
  try {
    if (child.pid) process.kill(-child.pid, signal)
  } catch {
    // The group has ended already.
  }
}

/** Passes SIGINT and SIGTERM on to what run() started, then exits. Returns a function that takes this back. */
export function stopOnSignal() {
  const stop = async (signal) => {
    for (const child of running) endGroup(child, 'SIGTERM')
    for (let waited = 0; running.size && waited < 15_000; waited += 100) await new Promise(resolve => setTimeout(resolve, 100))
    for (const child of running) endGroup(child, 'SIGKILL')
    process.exit(signal === 'SIGINT' ? 130 : 143)
  }
  process.on('SIGINT', stop)
  process.on('SIGTERM', stop)
  return () => {
    process.off('SIGINT', stop)
    process.off('SIGTERM', stop)
  }
}

export function requireNode() {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major !== 20 || minor < 19) throw new Error(`Rimwright needs Node 20 (20.19 or later); this is ${process.versions.node}.`)
}

// Debian's package makes and starts a cluster of its own when it is installed. Rimwright has its own, so it asks for none.
const NO_MAIN_CLUSTER = '/etc/postgresql-common/createcluster.d/rimwright.conf'

/** Installs those of the named Debian packages that are missing; asks nothing. */
export async function ensurePackages(names) {
  const missing = names.filter(name => !PROBES[name]())
  if (!missing.length) return
  const list = missing.join(' ')
  if (!existsSync('/usr/bin/apt-get')) throw new Error(`Missing: ${list}. This machine has no apt-get: install them by hand, then run this again.`)
  const asRoot = process.getuid() === 0 ? [] : ['sudo', '-n']
  if (asRoot.length && await run('sudo', ['-n', 'true'], { stdio: 'ignore' }) !== 0) {
    throw new Error(`Missing: ${list}. Install with: sudo apt-get install ${list}\nthen run this again (or run it as a user who may use sudo without a password).`)
  }
  const privileged = (...command) => {
    const [file, ...args] = [...asRoot, 'env', 'DEBIAN_FRONTEND=noninteractive', 'NEEDRESTART_MODE=l', ...command]
    return run(file, args, { cwd: '/', limitMs: 20 * 60_000 })
  }
  console.log(`Installing ${list}`)
  const apt = ['apt-get', '-qq', '-y', '-o', 'DPkg::Lock::Timeout=600', '-o', 'Acquire::Retries=3']
  const quietCluster = missing.includes('postgresql')
  if (quietCluster) await privileged('sh', '-c', `mkdir -p ${dirname(NO_MAIN_CLUSTER)} && echo 'create_main_cluster = false' > ${NO_MAIN_CLUSTER}`)
  try {
    await privileged(...apt, 'update')
    await privileged(...apt, 'install', '--no-install-recommends', ...missing)
  } finally {
    if (quietCluster) await privileged('rm', '-f', NO_MAIN_CLUSTER)
  }
  const still = names.filter(name => !PROBES[name]())
  if (still.length) throw new Error(`Could not install ${still.join(', ')}. The lines above say why.`)
}

/** Runs npm ci unless node_modules is what package-lock.json says. */
export async function ensureNodeModules() {
  if (installedMatchesLock()) return
  console.log('Installing npm packages')
  // Development packages too, whatever NODE_ENV says: the build needs them.
  const code = await run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund', '--loglevel=error'], { limitMs: 20 * 60_000 })
  if (code !== 0) throw new Error('npm ci failed. The lines above say why.')
  writeFileSync(installedStamp, lockHash())
}

const installedStamp = join(root, 'node_modules/.installed-from')

function lockHash() {
  return createHash('sha256').update(readFileSync(join(root, 'package-lock.json'))).digest('hex')
}

/**
 * By the stamp of our own npm ci, else (after an npm install by hand) by comparing what npm says is installed. npm writes
 * node_modules/.package-lock.json last, so a broken-off install has none.
 */
function installedMatchesLock() {
  if (existsSync(installedStamp) && readFileSync(installedStamp, 'utf8') === lockHash()) return true
  const installedFile = join(root, 'node_modules/.package-lock.json')
  if (!existsSync(installedFile)) return false
  const wanted = JSON.parse(readFileSync(join(root, 'package-lock.json'), 'utf8')).packages
  const installed = JSON.parse(readFileSync(installedFile, 'utf8')).packages
  // Optional packages for other systems are in the lock and rightly not installed, as are those that nothing needs.
  return Object.entries(wanted).every(([path, { version, optional, devOptional, extraneous }]) =>
    path === '' || optional || devOptional || extraneous || installed[path]?.version === version)
}

const OWN_SETTINGS = /^(PORT|HOST|NITRO_.*|NUXT_.*|DATABASE_URL|DATA_DIR|DEMO|PUBLIC_URL|STRIPE_.*|SMTP_URL|MAIL_.*|SESSION_PASSWORD|NODE_ENV|NODE_OPTIONS|VITEST.*|PG[A-Z]+)$/

/** The environment without settings of an installation: tests must never reach a database or service that it names. */
export function cleanEnv(env = process.env) {
  return Object.fromEntries(Object.entries(env).filter(([name]) => !OWN_SETTINGS.test(name)))
}
