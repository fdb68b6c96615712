// npm test: everything that the tests need is installed, then lint, types, build and all tests run. With Node's own
// modules only, as it starts on a fresh clone. The last line is "N passed, N failed"; a check that could not run, a
// runner without tests and a skipped test count as failed.
//   node scripts/test.mjs [unit|server|e2e]
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { cleanEnv, ensureNodeModules, ensurePackages, requireNode, root, run, stopOnSignal } from './start-lib.mjs'
import { readPlaywright, readVitest } from './test-counts.mjs'

const MINUTE = 60_000
const SOUND_TOOLS = ['sox', 'espeak-ng', 'fluidsynth', 'fluid-soundfont-gm', 'sonic-pi-samples']
const PACKAGES = { unit: SOUND_TOOLS, server: [...SOUND_TOOLS, 'postgresql'], e2e: [...SOUND_TOOLS, 'postgresql', 'chromium'] }

const only = process.argv[2]
if (only !== undefined && !(only in PACKAGES)) {
  console.error('Usage: node scripts/test.mjs [unit|server|e2e]')
  process.exit(2)
}
const wanted = name => only === undefined || only === name
const folder = mkdtempSync(join(tmpdir(), 'rimwright-counts-'))
const env = { ...cleanEnv(), NUXT_TELEMETRY_DISABLED: '1' }
const results = []

process.on('exit', () => rmSync(folder, { recursive: true, force: true }))
stopOnSignal()

try {
  requireNode()
  await ensurePackages([...new Set(Object.entries(PACKAGES).filter(([name]) => wanted(name)).flatMap(([, packages]) => packages))])
  await ensureNodeModules()
  await testAll()
} catch (error) {
  console.error(error instanceof Error ? error.message : error)
  results.push({ name: 'set-up', passed: 0, failed: 1 })
}

console.log()
for (const { name, passed, failed, seconds } of results) console.log(`${name}: ${passed} passed, ${failed} failed${seconds === undefined ? '' : ` (${seconds} s)`}`)
const sum = key => results.reduce((total, result) => total + result[key], 0)
const failed = sum('failed')
console.log(`${sum('passed')} passed, ${failed} failed`)
process.exitCode = failed ? 1 : 0

async function testAll() {
  if (await bin('nuxt/bin/nuxt.mjs', ['prepare'], 5 * MINUTE) !== 0) throw new Error('nuxt prepare failed.')
  if (only === undefined) {
    await check('lint', () => bin('eslint/bin/eslint.js', ['.'], 5 * MINUTE))
    await check('types', () => bin('nuxt/bin/nuxt.mjs', ['typecheck'], 10 * MINUTE))
  }
  const built = only === 'unit' || await check('build', () => node(['--import', 'tsx', 'local/build-main.ts'], 10 * MINUTE))
  // Whatever project is not "server" needs no running app.
  if (wanted('unit')) await vitest('unit', ['--project', '!server'], 20 * MINUTE)
  if (!built) return results.push(...['server', 'e2e'].filter(wanted).map(name => ({ name, passed: 0, failed: 1 })))
  if (wanted('server')) await vitest('server', ['--project', 'server'], 15 * MINUTE)
  if (wanted('e2e')) await playwright('e2e', 25 * MINUTE)
}

function node(args, limitMs, extra = {}) {
  return run(process.execPath, args, { env: { ...env, ...extra }, limitMs })
}

function bin(file, args, limitMs, extra = {}) {
  return node([join(root, 'node_modules', file), ...args], limitMs, extra)
}

/** A check without tests of its own counts as one. */
async function check(name, action) {
  const started = Date.now()
  heading(name)
  const code = await action()
  add(name, started, code === 0 ? { passed: 1, failed: 0 } : { passed: 0, failed: 1 })
  return code === 0
}

async function vitest(name, args, limitMs) {
  const started = Date.now()
  heading(name)
  const report = join(folder, `${name}.json`)
  const code = await bin('vitest/vitest.mjs', ['run', ...args, '--allowOnly=false', '--reporter=default', '--reporter=json', `--outputFile.json=${report}`], limitMs)
  add(name, started, readVitest(report, code))
}

async function playwright(name, limitMs) {
  const started = Date.now()
  heading(name)
  const report = join(folder, `${name}.json`)
  const code = await bin('@playwright/test/cli.js', ['test', '--reporter=list,json'], limitMs, { PLAYWRIGHT_JSON_OUTPUT_NAME: report })
  add(name, started, readPlaywright(report, code))
}

function heading(name) {
  console.log(`\n== ${name}`)
}

function add(name, started, counts) {
  results.push({ name, seconds: Math.round((Date.now() - started) / 1000), ...counts })
}
