import AxeBuilder from '@axe-core/playwright'
import { readdirSync } from 'node:fs'
import { type DemoPerson, expect, type Page, test } from './fixtures'

// Every page is named here with who opens it; the first test fails when one is missing. A function finds the id of what to show.
const pages: Record<string, { who: DemoPerson | null, path: string | ((page: Page) => Promise<string>) }> = {
  'index': { who: null, path: '/' },
  'sign-in': { who: null, path: '/sign-in' },
  'sign-up': { who: null, path: '/sign-up' },
  'forgot-password': { who: null, path: '/forgot-password' },
  'reset-password': { who: null, path: `/reset-password?token=${'x'.repeat(43)}` },
  'confirm-email': { who: null, path: `/confirm-email?token=${'x'.repeat(43)}` },
  'account': { who: 'player', path: '/account' },
  'people': { who: 'owner', path: '/people' },
  'histories': { who: 'staff', path: '/histories' },
  'bench': { who: 'maker', path: '/bench' },
  'instruments/index': { who: 'maker', path: '/instruments' },
  'instruments/new': { who: 'maker', path: '/instruments/new' },
  'instruments/[id]/index': { who: 'maker', path: async page => `/instruments/${await firstId(page, '/api/instruments')}` },
  'instruments/[id]/edit': { who: 'maker', path: async page => `/instruments/${await firstId(page, '/api/instruments')}/edit` },
  'readings/[id]': { who: 'maker', path: async page => `/readings/${await firstId(page, '/api/readings')}` },
  'turn-sheets/[id]': { who: 'maker', path: newTurnSheet },
  'design': { who: 'player', path: '/design' },
  'orders/index': { who: 'staff', path: '/orders' },
  'orders/[id]': { who: 'staff', path: async page => `/orders/${await firstId(page, '/api/orders')}` },
}

async function firstId(page: Page, api: string): Promise<string> {
  const { items } = await (await page.request.get(api)).json() as { items: { id: string }[] }
  expect(items.length, `the demo fills ${api}`).toBeGreaterThan(0)
  return items[0]!.id
}

async function newTurnSheet(page: Page): Promise<string> {
  const { items: [reading] } = await (await page.request.get('/api/readings?doubtful=false&limit=1')).json() as { items: { id: string, tension: { nPerM: number } }[] }
  const answer = await page.request.post('/api/turn-sheets', { data: { readingId: reading?.id, target: { kind: 'tension', nPerM: Math.round(reading!.tension.nPerM * 1.02) } } })
  expect(answer.status(), await answer.text()).toBe(201)
  return `/turn-sheets/${(await answer.json() as { id: string }).id}`
}

test('every page is on the list of this test', () => {
  const files = readdirSync('app/pages', { recursive: true, encoding: 'utf8' }).filter(file => file.endsWith('.vue')).map(file => file.replace(/\.vue$/, '').replaceAll('\\', '/'))
  expect(files.toSorted()).toEqual(Object.keys(pages).toSorted())
})

// One test a page: loading it is the slow part, and each step names what it checks.
for (const [name, { who, path }] of Object.entries(pages)) {
  test(`page ${name} passes axe for WCAG 2.2 AA in light and dark, has one title and first heading, and fits 320 px`, async ({ page, signIn }) => {
    if (who) await signIn(who)
    await page.emulateMedia({ reducedMotion: 'reduce' })
    await page.goto(typeof path === 'string' ? path : await path(page), { waitUntil: 'networkidle' })
    for (const colorScheme of ['light', 'dark'] as const) {
      await test.step(`axe in ${colorScheme}`, async () => {
        await page.emulateMedia({ colorScheme })
        const { violations } = await new AxeBuilder({ page }).withTags(['wcag2a', 'wcag2aa', 'wcag21aa', 'wcag22aa']).analyze()
        expect.soft(violations.map(({ id, nodes }) => `${id}: ${nodes.map(node => `${node.target.join(' ')} (${node.failureSummary?.split('\n')[1]?.trim()})`).join('; ')}`), colorScheme).toEqual([])
      })
    }
    await test.step('one title and one first heading', async () => {
      expect.soft(await page.title()).toMatch(name === 'index' ? /Rimwright/ : /.+ · Rimwright$/)
      await expect.soft(page.getByRole('heading', { level: 1 })).toHaveCount(1)
      await expect.soft(page.getByRole('main')).toHaveCount(1)
    })
    await test.step('no sideways scrolling at 320 px', async () => {
      await page.setViewportSize({ width: 320, height: 640 })
      // WCAG 2.2, 1.4.10: 320 CSS px without scrolling in two directions; tables may scroll in their own frame.
      await expect.poll(() => page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(320)
    })
  })
}
