import { readFile } from 'node:fs/promises'
import { expect, type Page, test } from './fixtures'

const rows = (page: Page) => page.locator('tbody tr')
const total = async (page: Page) => Number((await page.locator('nav[aria-label="Pages of the list"] [role=status]').innerText()).replace(/^.* of (about )?/, '').replaceAll('\u2009', ''))

test.beforeEach(async ({ page, signIn }) => {
  await signIn('staff')
  await page.goto('/histories')
  await expect(rows(page)).toHaveCount(50)
})

test('staff search, filter, sort and page through all readings, and the address keeps the view', async ({ page }) => {
  const all = await total(page)
  const code = (await rows(page).first().getByRole('rowheader').innerText()).split(/\s/)[0]!

  await page.getByRole('searchbox', { name: 'Find' }).fill(code)
  await expect(page).toHaveURL(new RegExp(`q=${code}`))
  await expect.poll(() => total(page)).toBeLessThan(all)
  for (const text of await rows(page).getByRole('rowheader').allInnerTexts()) expect(text).toContain(code)
  await page.getByRole('searchbox', { name: 'Find' }).fill('')
  await expect.poll(() => total(page)).toBe(all)

  await page.getByRole('button', { name: 'Filters' }).click()
  await page.getByRole('combobox', { name: 'Construction' }).selectOption('kettle')
  await expect(page).toHaveURL(/construction=kettle/)
  await expect.poll(() => total(page)).toBeLessThan(all)

  await page.getByRole('button', { name: 'Tension, N/m' }).click()
  await expect(page.getByRole('columnheader', { name: 'Tension, N/m' })).toHaveAttribute('aria-sort', 'descending')
  const tensions = async () => (await rows(page).locator('td.tension').allInnerTexts()).map(text => Number.parseFloat(text))
  await expect.poll(async () => isFalling(await tensions())).toBe(true)
  await page.getByRole('button', { name: 'Tension, N/m' }).click()
  await expect(page.getByRole('columnheader', { name: 'Tension, N/m' })).toHaveAttribute('aria-sort', 'ascending')
  await expect.poll(async () => isFalling((await tensions()).toReversed())).toBe(true)

  const address = page.url()
  const shown = await rows(page).allInnerTexts()
  await page.reload()
  expect(await rows(page).allInnerTexts()).toEqual(shown)
  expect(page.url()).toBe(address)

  await page.getByRole('button', { name: /kettle.*take this filter off/i }).click()
  await expect.poll(() => total(page)).toBe(all)
  const first = await rows(page).first().innerText()
  await page.getByRole('button', { name: 'Next' }).click()
  await expect(page.getByText(/^51 to 100 of/)).toBeVisible()
  expect(await rows(page).first().innerText()).not.toBe(first)
  await page.getByRole('button', { name: 'Previous' }).click()
  await expect(page.getByText(/^1 to 50 of/)).toBeVisible()
  expect(await rows(page).first().innerText()).toBe(first)
  await page.goBack()
  await expect(page.getByText(/^51 to 100 of/)).toBeVisible()
})

test('a row opens its reading, by pointer and by keyboard', async ({ page }) => {
  await rows(page).first().locator('td.tension').click()
  await expect(page).toHaveURL(/\/readings\/[0-9a-f-]{36}$/)
  await page.goBack()
  const link = rows(page).nth(1).getByRole('link').first()
  await link.focus()
  await expect(link).toBeInViewport()
  await page.keyboard.press('Enter')
  await expect(page).toHaveURL(/\/readings\/[0-9a-f-]{36}$/)
  await expect(page.getByRole('heading', { level: 1 })).toBeVisible()
})

test('the export holds exactly what is filtered, in the order of the table', async ({ page }) => {
  await page.goto('/histories?construction=kettle&sort=tension&limit=200')
  await expect(rows(page).first()).toBeVisible()
  const all = await total(page)
  const [download] = await Promise.all([page.waitForEvent('download'), page.getByRole('link', { name: 'Export CSV' }).click()])
  expect(download.suggestedFilename()).toMatch(/^readings-\d{4}-\d\d-\d\d\.csv$/)
  const [header, ...lines] = (await readFile(await download.path(), 'utf8')).trimEnd().split('\r\n')
  expect(header).toMatch(/^taken_at,instrument_code,.*,tension_n_per_m,/)
  expect(lines).toHaveLength(all)
  expect(lines.every(line => line.includes(',kettle,'))).toBe(true)
  const codes = (await rows(page).getByRole('rowheader').allInnerTexts()).map(text => text.split(/\s/)[0])
  expect(lines.slice(0, codes.length).map(line => line.split(',')[1])).toEqual(codes)
})

test('chosen columns stay chosen', async ({ page }) => {
  await page.getByRole('button', { name: 'Columns' }).click()
  await page.getByRole('checkbox', { name: 'Owner' }).uncheck()
  await page.getByRole('checkbox', { name: /Air/ }).check()
  await expect(page.getByRole('columnheader', { name: 'Owner' })).toHaveCount(0)
  await page.reload()
  await expect(page.getByRole('columnheader', { name: /Air/ })).toBeVisible()
  await expect(page.getByRole('columnheader', { name: 'Owner' })).toHaveCount(0)
})

test('a search without a find says what to do, and leads back', async ({ page }) => {
  await page.getByRole('searchbox', { name: 'Find' }).fill('no such drum')
  await expect(page.getByText('No reading fits')).toBeVisible()
  await page.getByRole('button', { name: 'Show all readings' }).click()
  await expect(rows(page)).toHaveCount(50)
  await expect(page.getByRole('searchbox', { name: 'Find' })).toHaveValue('')
})

test.describe('a broken place in the list', () => {
  test.use({ allowedErrors: [/400/] })
  test('is said in words, with a way on', async ({ page }) => {
    await page.goto('/histories?cursor=nonsense')
    await expect(page.getByRole('alert')).toContainText('Open the list from its start.')
    await page.getByRole('button', { name: 'From the start of the list' }).click()
    await expect(rows(page)).toHaveCount(50)
  })
})

function isFalling(figures: number[]): boolean {
  // Shown figures are cut to what their uncertainty supports: neighbours may round apart by one step of ten.
  return figures.length > 1 && figures.every((figure, index) => index === 0 || figure <= figures[index - 1]! + 10)
}
