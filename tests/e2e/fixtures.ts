// Every end-to-end test imports `test` and `expect` from here: the address of the running stack, signing in, and a
// watch that fails a test on console errors, page errors, CSP violations and requests that leave the machine.
import { test as base, expect, type BrowserContext, type ConsoleMessage, type Page } from '@playwright/test'
import type { StackInfo } from '../support/stack-client'
import { STACK_VARIABLE } from '../support/e2e.global'

interface Fixtures {
  stack: StackInfo
  /** Console errors that a test provokes on purpose, such as a refused form (the browser logs each 4xx). */
  allowedErrors: RegExp[]
  watch: undefined
  /** Signs in through the form's route, as a demo person unless told otherwise. */
  signIn: (who: DemoPerson | { email: string, password: string }) => Promise<void>
}

export type DemoPerson = 'owner' | 'maker' | 'staff' | 'player'
export const DEMO_PASSWORD = 'drumhead-demo'

export const test = base.extend<Fixtures>({
  stack: async ({}, use) => use(readStack()),
  baseURL: async ({ stack }, use) => use(stack.baseUrl),
  allowedErrors: [[], { option: true }],

  watch: [async ({ context, allowedErrors }, use) => {
    const faults = watchContext(context)
    await use(undefined)
    expect(faults().filter(fault => !allowedErrors.some(allowed => allowed.test(fault))), 'the browser reported').toEqual([])
  }, { auto: true }],

  signIn: async ({ page }, use) => use(async (who) => {
    const account = typeof who === 'string' ? { email: `${who}@rimwright.test`, password: DEMO_PASSWORD } : who
    const response = await page.request.post('/api/auth/sign-in', { data: account })
    expect(response.status(), `signing in as ${account.email}`).toBe(200)
  }),
})

export { expect, type Page }

function readStack(): StackInfo {
  const text = process.env[STACK_VARIABLE]
  if (!text) throw new Error('The end-to-end stack does not run: start with npm run test:e2e or npx playwright test.')
  return JSON.parse(text) as StackInfo
}

/** Collects what a clean run has none of, on all pages of the context. */
function watchContext(context: BrowserContext): () => string[] {
  const faults: string[] = []
  context.on('console', (message: ConsoleMessage) => {
    // CSP violations and hydration mismatches of a build arrive as errors too.
    const mismatch = message.type() === 'warning' && /hydration/i.test(message.text())
    if (message.type() === 'error' || mismatch) faults.push(`console: ${message.text()} (${message.location().url})`)
  })
  context.on('weberror', error => faults.push(`page error: ${error.error().message}`))
  context.on('request', (request) => {
    const url = new URL(request.url())
    const local = ['data:', 'blob:', 'about:'].includes(url.protocol) || url.hostname === '127.0.0.1'
    if (!local) faults.push(`request left the machine: ${request.url()}`)
  })
  return () => faults
}
