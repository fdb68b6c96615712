// Reads how many tests passed and failed from the reports of the runners. What did not run counts as failed.
import { existsSync, readFileSync } from 'node:fs'

/** @param code the runner's exit code: a non-zero one is a failure even where the report shows none */
export function readVitest(file, code) {
  const report = read(file)
  const skipped = (report?.numPendingTests ?? 0) + (report?.numTodoTests ?? 0)
  // A file that could not be loaded has no tests to fail.
  const broken = (report?.testResults ?? []).filter(result => result.status === 'failed' && !result.assertionResults.some(test => test.status === 'failed')).length
  return settle({ passed: report?.numPassedTests ?? 0, failed: (report?.numFailedTests ?? 0) + skipped + broken }, code)
}

export function readPlaywright(file, code) {
  const report = read(file)
  const { expected = 0, unexpected = 0, flaky = 0, skipped = 0 } = report?.stats ?? {}
  return settle({ passed: expected, failed: unexpected + flaky + skipped + (report?.errors?.length ?? 0) }, code)
}

function settle({ passed, failed }, code) {
  const hidden = failed === 0 && (code !== 0 || passed === 0)
  return { passed, failed: hidden ? 1 : failed }
}

function read(file) {
  if (!existsSync(file)) return undefined
  try {
    return JSON.parse(readFileSync(file, 'utf8'))
  } catch {
    return undefined
  }
}
