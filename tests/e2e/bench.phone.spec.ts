import { benchTap } from '../support/bench-drum'
import { expect, type Page, test } from './fixtures'

/** A drum with a reading and a sheet of its own, made by the API: the phone only follows it. */
async function makeSheet(page: Page): Promise<string> {
  const film = { material: 'pet', plies: 1, thicknessUm: 250, densityKgM3: 1390, modulusGPa: 4.5, poisson: 0.38, yieldMPa: 100 }
  const drum = await (await page.request.post('/api/instruments', {
    data: { name: 'Tom on the phone', construction: 'open', diameterMm: 349.25, depthMm: 203, rodCount: 6, threadPitchMm: 1.058, heads: [{ side: 'batter', film, arealDensityKgM2: 0.3475 }] },
  })).json() as { heads: { id: string }[] }
  const answer = await (await page.request.post(`/api/heads/${drum.heads[0]!.id}/recordings`, {
    multipart: { strike: 'centre', file: { name: 'tap.wav', mimeType: 'audio/wav', buffer: benchTap().wav } },
  })).json() as { reading: { id: string, tension: { nPerM: number } } }
  const sheet = await page.request.post('/api/turn-sheets', { data: { readingId: answer.reading.id, target: { kind: 'tension', nPerM: Math.round(answer.reading.tension.nPerM * 1.2) } } })
  expect(sheet.status()).toBe(201)
  return (await sheet.json() as { id: string }).id
}

test('a maker follows the sheet rod by rod with a thumb, notes a rod that turned less, and goes on after a reload', async ({ page, signIn }) => {
  await signIn('maker')
  const id = await makeSheet(page)
  await page.goto(`/turn-sheets/${id}`, { waitUntil: 'networkidle' })
  await expect(page.getByRole('heading', { name: /^Step 1 of 6: rod 1/ })).toBeVisible()
  const next = page.getByRole('button', { name: 'Done, next rod' })
  const box = await next.boundingBox()
  // 48 px: a thumb's width (common practice, no source); WCAG 2.2 asks for 24.
  expect(box!.height).toBeGreaterThanOrEqual(48)
  expect(await page.evaluate(() => document.documentElement.scrollWidth <= window.innerWidth), 'the page does not scroll sideways').toBe(true)

  await next.tap()
  await expect(page.getByRole('heading', { name: /^Step 2 of 6: rod 4, straight across from rod 1/ })).toBeVisible()
  await page.getByRole('button', { name: '1 sixteenth', exact: true }).tap()
  await expect(page.getByText('Noted: ')).toBeVisible()
  const noted = await page.getByText('Noted: ').innerText()

  await page.reload()
  await expect(page.getByRole('heading', { name: /^Step 2 of 6/ })).toBeVisible()
  await expect(page.getByText(noted)).toBeVisible()

  for (let step = 2; step <= 5; step++) await next.tap()
  await page.getByRole('button', { name: 'Done, that was the last' }).tap()
  await expect(page.getByText('All rods are through.')).toBeVisible()
  const saved = page.waitForRequest(request => request.url().endsWith('/applied'))
  await page.getByRole('button', { name: 'Save what was turned' }).tap()
  const sent = (await saved).postDataJSON() as { rods: { rod: number, turns: number }[] }
  expect(sent.rods.find(rod => rod.rod === 4)!.turns * 16).toBe(Number(/Noted: [+\u2212]?(\d+)/.exec(noted)?.[1] ?? Number.NaN))
  await expect(page.getByRole('link', { name: 'Tap again' })).toBeVisible()
})
