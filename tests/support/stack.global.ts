import type { TestProject } from 'vitest/node'
import { startStack, type StackInfo } from './stack-client'

declare module 'vitest' {
  interface ProvidedContext { stack: StackInfo }
}

/** Starts one stack without demo data for all tests of the project "server". */
export default async function setup(project: TestProject): Promise<() => Promise<void>> {
  const { info, stop } = await startStack({ demo: false })
  project.provide('stack', info)
  return stop
}
