import { BENCH_DRUM, benchTap, silentWav } from '../support/bench-drum'
import { expect, type Page, test } from './fixtures'

const file = (buffer: Buffer, name: string) => ({ name, mimeType: 'audio/wav', buffer })

/** Chooses a construction with one head; again where the page was not awake yet. */
async function choose(page: Page, construction: 'open' | 'kettle') {
  await expect(async () => {
    await page.getByLabel('Construction').selectOption('double-headed')
    await page.getByLabel('Construction').selectOption(construction)
    await expect(page.getByLabel('Film', { exact: true })).toHaveCount(1, { timeout: 1000 })
  }).toPass()
}

/** Registers the drum of tests/support/bench-drum.ts by its form, in trade units. */
async function register(page: Page, name: string) {
  await page.goto('/instruments', { waitUntil: 'networkidle' })
  await page.getByRole('link', { name: 'Register an instrument' }).first().click()
  await expect(page).toHaveURL(/\/instruments\/new/)
  await choose(page, 'open')
  await expect(page.getByRole('textbox', { name: 'Rods on a head' })).toHaveValue('8')
  await page.getByRole('textbox', { name: 'Name' }).fill(name)
  await page.getByRole('textbox', { name: 'Vibrating diameter' }).fill('13.75')
  await page.getByRole('group', { name: 'Unit of shell depth' }).getByRole('button', { name: 'mm' }).click()
  await page.getByRole('textbox', { name: 'Shell depth' }).fill(String(BENCH_DRUM.depthM * 1000))
  await page.getByLabel('Film', { exact: true }).selectOption({ label: 'Clear 250, 9.8\u2009mil' })
  await page.getByRole('button', { name: 'Register' }).click()
  await expect(page.getByRole('heading', { level: 1, name })).toBeVisible()
}

test.beforeEach(async ({ signIn }) => signIn('maker'))

test('a maker registers a drum, drops a tap, reads its tension, follows a turn sheet and finds both in the history', async ({ page }) => {
  const tap = benchTap()
  await register(page, '14 in open tom, bench test')
  await expect(page.getByText('No reading yet')).toBeVisible()

  await page.getByRole('link', { name: 'To the bench' }).click()
  await expect(page.getByText('Choose another')).toBeVisible()
  await page.getByLabel('Recordings to read').setInputFiles(file(tap.wav, 'tap.wav'))

  await expect(page).toHaveURL(/\/readings\//)
  const tension = await page.locator('.fig-lead').first().innerText()
  // 5 %: that the right file was read on the right drum; how well is asked in tests/unit/accuracy.
  expect(Math.abs(Number(tension) / tap.tensionNPerM - 1)).toBeLessThan(0.05)
  const modes = page.getByRole('region', { name: 'Table of matched modes' }).locator('tbody tr')
  expect(await modes.count()).toBeGreaterThanOrEqual(4)

  await page.getByRole('button', { name: /^Mode \(1,1\), measured/ }).focus()
  await expect(page.getByRole('img', { name: /^Mode \(1,1\)/ })).toBeVisible()
  await expect(page.getByRole('row', { name: /^\(1,1\)/ })).toHaveClass(/lit/)

  await page.getByRole('button', { name: 'A semitone up' }).click()
  await page.getByRole('button', { name: 'A semitone up' }).click()
  await page.getByRole('button', { name: 'Make the turn sheet' }).click()
  await expect(page).toHaveURL(/\/turn-sheets\//)
  for (const rod of [1, 2, 3, 4, 5, 6, 7, 8]) await page.getByRole('checkbox', { name: `Rod ${rod} done` }).check()
  await page.reload()
  await expect(page.getByText('All rods are through.')).toBeVisible()
  await page.getByRole('button', { name: 'Save what was turned' }).click()
  await expect(page.getByText('Turned on ')).toBeVisible()
  await expect(page.getByRole('link', { name: 'Tap again' })).toBeVisible()

  await page.getByRole('link', { name: 'Tuning history' }).click()
  const history = page.getByRole('region', { name: 'Table of readings and turns' }).locator('tbody tr')
  await expect(history).toHaveCount(2)
  await expect(history.filter({ hasText: 'turned' })).toHaveCount(1)
  await expect(history.filter({ hasText: 'centre' })).toContainText(tension)
})

test.describe('a recording that cannot be read', () => {
  // The browser logs the refusal's status.
  test.use({ allowedErrors: [/422/] })

  test('is refused in words and leaves the reading out of the history', async ({ page }) => {
    await register(page, 'Drum that nobody tapped')
    await page.getByLabel('Recordings to read').setInputFiles([file(silentWav(), 'silence.wav'), file(Buffer.from('not a sound'), 'letter.wav')])
    await expect(page.getByText('2 of 2 through')).toBeVisible()
    const uploads = page.getByRole('region', { name: 'Recordings' }).getByRole('listitem')
    await expect(uploads.filter({ hasText: 'silence.wav' }).getByRole('alert')).not.toBeEmpty()
    await expect(uploads.filter({ hasText: 'letter.wav' }).getByRole('alert')).toContainText('cannot read this file as sound')
    await page.reload()
    await expect(page.getByText('No reading yet')).toBeVisible()
  })
})

test('the form says beside each field what is wrong and keeps what was typed', async ({ page }) => {
  await page.goto('/instruments/new', { waitUntil: 'networkidle' })
  await page.getByRole('textbox', { name: 'Vibrating diameter' }).fill('-3')
  await page.getByRole('textbox', { name: 'Rods on a head' }).fill('0')
  await page.getByRole('button', { name: 'Register' }).click()
  await expect(page.getByText('Fill this in.')).toBeVisible()
  await expect(page.getByText('Vibrating diameter is at least 75 mm.')).toBeVisible()
  await expect(page.getByText('Rods is at least 3.')).toBeVisible()
  await expect(page.getByRole('textbox', { name: 'Name' })).toBeFocused()
  await expect(page.getByRole('textbox', { name: 'Vibrating diameter' })).toHaveValue('-3')
})

test('choosing construction and size fills what was not typed', async ({ page }) => {
  await page.goto('/instruments/new', { waitUntil: 'networkidle' })
  await expect(page.getByRole('group', { name: 'Resonant head' })).toBeVisible()
  await choose(page, 'kettle')
  const before = Number(await page.getByRole('textbox', { name: 'Bowl volume' }).inputValue())
  await page.getByRole('textbox', { name: 'Vibrating diameter' }).fill('31')
  await expect.poll(async () => Number(await page.getByRole('textbox', { name: 'Bowl volume' }).inputValue())).toBeGreaterThan(before)
  await page.getByRole('textbox', { name: 'Bowl volume' }).fill('140')
  await page.getByRole('textbox', { name: 'Vibrating diameter' }).fill('25')
  await expect(page.getByRole('textbox', { name: 'Bowl volume' })).toHaveValue('140')
})
