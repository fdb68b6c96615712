import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, expect, it } from 'vitest'
import { fingerprintSources, isBuilt } from '../../../local/build'

let root: string
beforeEach(async () => {
  root = await mkdtemp(join(tmpdir(), 'rimwright-build-'))
  await mkdir(join(root, 'server/api'), { recursive: true })
  await mkdir(join(root, 'tests'))
  await writeFile(join(root, 'server/api/health.get.ts'), 'a')
})
afterEach(() => rm(root, { recursive: true }))

it('changes when a source changes, comes or is renamed, and not when a test does', async () => {
  const prints = [fingerprintSources(root)]
  const remember = () => prints.push(fingerprintSources(root))
  await writeFile(join(root, 'tests/a.test.ts'), 'x')
  expect(fingerprintSources(root)).toBe(prints[0])
  await writeFile(join(root, 'server/api/health.get.ts'), 'b')
  remember()
  await writeFile(join(root, 'server/api/other.get.ts'), 'b')
  remember()
  await writeFile(join(root, 'nuxt.config.ts'), 'c')
  remember()
  expect(new Set(prints).size).toBe(4)
})

it('does not take an output for built that was built from other sources', async () => {
  await mkdir(join(root, '.output/server'), { recursive: true })
  await writeFile(join(root, '.output/server/index.mjs'), '')
  expect(isBuilt(root)).toBe(false)
  await writeFile(join(root, '.output/built-from'), fingerprintSources(root))
  expect(isBuilt(root)).toBe(true)
  await writeFile(join(root, 'server/api/health.get.ts'), 'changed')
  expect(isBuilt(root)).toBe(false)
})
