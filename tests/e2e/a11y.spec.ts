import AxeBuilder from '@axe-core/playwright'
import { readdirSync } from 'node:fs'
import type { ReadingsPage } from '../../shared/schemas/reading'
import { type DemoPerson, expect, type Page, test } from './fixtures'

// Every page is named here with who opens it; the first test fails when one is missing. A function finds the id of what to show.
const pages: Record<string, { who: DemoPerson | null, path: string | ((page: Page) => Promise<string>) }> = {
  'index': { who: null, path: '/' },
  'accuracy': { who: null, path: '/accuracy' },
  'sign-in': { who: null, path: '/sign-in' },
  'sign-up': { who: null, path: '/sign-up' },
  'forgot-password': { who: null, path: '/forgot-password' },
  'reset-password': { who: null, path: `/reset-password?token=${'x'.repeat(43)}` },
  'confirm-email': { who: null, path: `/confirm-email?token=${'x'.repeat(43)}` },
  'account': { who: 'player', path: '/account' },
  'people': { who: 'owner', path: '/people' },
  'histories/index': { who: 'staff', path: '/histories' },
  'histories/rereading': { who: 'owner', path: '/histories/rereading' },
  'bench': { who: 'maker', path: '/bench' },
  'instruments/index': { who: 'maker', path: '/instruments' },
  'instruments/new': { who: 'maker', path: '/instruments/new' },
  'instruments/[id]/index': { who: 'maker', path: async page => `/instruments/${await firstId(page, '/api/instruments')}` },
  'instruments/[id]/edit': { who: 'maker', path: async page => `/instruments/${await firstId(page, '/api/instruments')}/edit` },
  'instruments/[id]/calibrate': { who: 'maker', path: async page => `/instruments/${await firstId(page, '/api/instruments')}/calibrate` },
  'both-heads/[id]': { who: 'maker', path: newBothHeads },
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

/** A tap on each head of one of the demo's double-headed drums, read together: as close in time as they come. */
async function newBothHeads(page: Page): Promise<string> {
  const list = async (side: string) => (await (await page.request.get(`/api/readings?construction=double-headed&side=${side}&limit=200`)).json() as ReadingsPage).items
  const [batters, resonants] = [await list('batter'), await list('resonant')]
  const apart = (a: string, b: string) => Math.abs(new Date(a).getTime() - new Date(b).getTime())
  const [pair] = batters.flatMap(batter => resonants.filter(resonant => resonant.instrumentId === batter.instrumentId).map(resonant => ({ batter, resonant })))
    .sort((a, b) => apart(a.batter.takenAt, a.resonant.takenAt) - apart(b.batter.takenAt, b.resonant.takenAt))
  const answer = await page.request.post('/api/both-heads', { data: { batterReadingId: pair?.batter.id, resonantReadingId: pair?.resonant.id } })
  expect(answer.status(), await answer.text()).toBe(201)
  return `/both-heads/${(await answer.json() as { id: string }).id}`
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
