import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { readPlaywright, readVitest } from '../../../scripts/test-counts.mjs'

let folder: string
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), 'rimwright-counts-'))
})
afterEach(() => rm(folder, { recursive: true }))

const report = async (content: unknown) => {
  const file = join(folder, 'report.json')
  await writeFile(file, typeof content === 'string' ? content : JSON.stringify(content))
  return file
}
const vitest = (changes: object = {}) => report({ numPassedTests: 5, numFailedTests: 0, numPendingTests: 0, numTodoTests: 0, testResults: [], ...changes })
const playwright = (stats: object, errors: object[] = []) => report({ stats: { expected: 3, unexpected: 0, flaky: 0, skipped: 0, ...stats }, errors })

describe('what npm test counts', () => {
  it('passes what passed', async () => {
    expect(readVitest(await vitest(), 0)).toEqual({ passed: 5, failed: 0 })
    expect(readPlaywright(await playwright({}), 0)).toEqual({ passed: 3, failed: 0 })
  })

  it('fails a skipped test, a test to be written and a flaky one', async () => {
    expect(readVitest(await vitest({ numPendingTests: 2, numTodoTests: 1 }), 0).failed).toBe(3)
    expect(readPlaywright(await playwright({ skipped: 1, flaky: 1, unexpected: 1 }), 1).failed).toBe(3)
  })

  it('fails a test file that could not be loaded', async () => {
    expect(readVitest(await vitest({ testResults: [{ status: 'failed', assertionResults: [] }] }), 1)).toEqual({ passed: 5, failed: 1 })
    expect(readPlaywright(await playwright({}, [{ message: 'SyntaxError' }]), 1)).toEqual({ passed: 3, failed: 1 })
  })

  it.each([['no report', undefined], ['a broken report', '{"numPassed'], ['no test', {}]])('fails a runner that leaves %s', async (_, content) => {
    const file = content === undefined ? join(folder, 'none.json') : await report(content)
    expect(readVitest(file, 0)).toEqual({ passed: 0, failed: 1 })
    expect(readPlaywright(file, 0)).toEqual({ passed: 0, failed: 1 })
  })

  it('fails a runner that ends with an error though each test passed', async () => {
    expect(readVitest(await vitest(), 1)).toEqual({ passed: 5, failed: 1 })
  })
})
