import { startStack } from './stack-client'

/** Where tests find the stack: Playwright's workers inherit the environment. */
export const STACK_VARIABLE = 'RIMWRIGHT_E2E_STACK'

/** Starts one stack with the demo for all end-to-end tests. */
export default async function setup(): Promise<() => Promise<void>> {
  const { info, stop } = await startStack({ demo: true })
  process.env[STACK_VARIABLE] = JSON.stringify(info)
  return stop
}
