import { openDatabase } from '../../db/database'
import type { InstrumentView } from '../../shared/schemas/instrument'
import type { RecordingAnswer } from '../../shared/schemas/reading'
import { BENCH_DRUM, benchTap } from '../support/bench-drum'
import { expect, type Page, test } from './fixtures'

const { batter } = BENCH_DRUM
const tap = benchTap()

/** The bench drum with one tap on it. */
async function readDrum(page: Page, name: string): Promise<{ drum: InstrumentView, answer: RecordingAnswer }> {
  const made = await page.request.post('/api/instruments', { data: {
    name, construction: 'open', diameterMm: 2000 * BENCH_DRUM.radiusM, depthMm: 1000 * BENCH_DRUM.depthM, rodCount: 8,
    heads: [{ side: 'batter', film: { material: 'pet', plies: batter.plies, thicknessUm: 250, densityKgM3: batter.filmDensityKgM3, modulusGPa: 4.5, poisson: batter.poisson, yieldMPa: 100 } }],
  } })
  expect(made.status(), await made.text()).toBe(201)
  const drum = await made.json() as InstrumentView
  const sent = await page.request.post(`/api/heads/${drum.heads[0]!.id}/recordings`, { multipart: { strike: 'edge', centreDamped: 'false', file: { name: 'tap.wav', mimeType: 'audio/wav', buffer: tap.wav } } })
  expect(sent.status(), await sent.text()).toBe(201)
  return { drum, answer: await sent.json() as RecordingAnswer }
}

test('a maker calibrates a head at a known tension, sees it on plate and head, and takes it off', async ({ page, signIn }) => {
  await signIn('maker')
  const { drum, answer } = await readDrum(page, 'Tom to calibrate')
  await page.goto(`/instruments/${drum.id}`, { waitUntil: 'networkidle' })
  await page.getByRole('link', { name: 'Calibrate at a known tension' }).click()
  await expect(page.getByRole('heading', { level: 1, name: 'Calibrate Tom to calibrate' })).toBeVisible()
  await page.getByRole('button', { name: 'Calibrate', exact: true }).click()
  await expect(page.getByLabel('Known tension', { exact: true })).toHaveAttribute('aria-invalid', 'true')
  await page.getByLabel('Known tension', { exact: true }).fill(String(tap.tensionNPerM))
  await page.getByLabel('May be off by, 95 %').fill('12')
  await page.getByRole('button', { name: 'Calibrate', exact: true }).click()

  await expect(page).toHaveURL(/\/readings\//)
  await expect(page.getByText('calibrated on')).toBeVisible()
  await expect(page.getByText(`Read before by version ${answer.reading!.analysisVersion}`)).toBeVisible()
  const tension = Number(await page.locator('.fig-lead').first().innerText())
  expect(Math.abs(tension / tap.tensionNPerM - 1)).toBeLessThan(0.005) // what was stated as known: 0.4 %, cut to its digits
  await expect(page.getByRole('region', { name: 'Table of the uncertainty budget' }).getByRole('rowheader', { name: /^calibration/ })).toBeVisible()

  await page.goto(`/instruments/${drum.id}`, { waitUntil: 'networkidle' })
  await expect(page.getByText('Calibrated on')).toBeVisible()
  await page.getByRole('button', { name: 'Take it off' }).click()
  await expect(page.getByRole('link', { name: 'Calibrate at a known tension' })).toBeVisible()
})

test('the owner reads old recordings again in the background; plate and history know both readings', async ({ page, signIn, stack }) => {
  await signIn('owner')
  const { drum, answer } = await readDrum(page, 'Tom with a past')
  const db = openDatabase(stack.databaseUrl, 1)
  await db.updateTable('recordings').set({ analysis_version: '0.9.0' }).where('id', '=', answer.recording.id!).execute()
  await db.updateTable('readings').set({ analysis_version: '0.9.0' }).where('id', '=', answer.reading!.id).execute()
  await db.destroy()

  await page.goto('/histories', { waitUntil: 'networkidle' })
  await page.getByRole('link', { name: 'Old recordings' }).click()
  await page.getByRole('button', { name: /^Read \d+ again$/ }).click()
  // 30 s: some dozen taps of the demo at most wait too, at less than a second each.
  await expect(page.getByRole('heading', { name: 'Last run, finished' })).toBeVisible({ timeout: 30_000 })
  await expect(page.getByRole('button', { name: 'All are up to date' })).toBeDisabled()

  await page.goto(`/readings/${answer.reading!.id}`)
  await page.getByRole('link', { name: /by version/ }).click()
  await expect(page.getByText('Read before by version 0.9.0')).toBeVisible()
  await page.goto(`/instruments/${drum.id}`)
  await expect(page.getByRole('region', { name: 'Table of readings and turns' }).locator('tbody tr')).toHaveCount(1)
})
