import { expect, test, type Page } from './fixtures'

test.setTimeout(120_000)

interface Mail { to: string, subject: string, text: string }

async function fillAddress(page: Page): Promise<void> {
  await page.getByLabel('Name', { exact: true }).fill('Ilse Brandt')
  await page.getByLabel('Street and number').fill('Mill Lane 3')
  await page.getByLabel('Postal code').fill('79100')
  await page.getByLabel('Town').fill('Aldertal')
}

async function designD3(page: Page): Promise<void> {
  await page.goto('/design')
  await expect(page.getByRole('heading', { level: 1, name: 'A head that sounds D3' })).toBeVisible()
  await expect(page.getByText('This can be made.')).toBeVisible({ timeout: 30_000 })
}

/** What the slip says in all, as '78.55'. */
async function quotedTotal(page: Page): Promise<string> {
  const total = page.getByRole('region', { name: 'Quote' }).getByRole('row', { name: /^Total/ })
  return (await total.innerText()).match(/\d+\.\d\d/)![0]
}

test('a customer designs a head, pays for it and gets a receipt; staff moves it to the bench', async ({ page, stack, signIn, browser }) => {
  await signIn('player')
  await designD3(page)

  // The film as the person changes it: a heavier head at the same pitch costs more.
  const before = Number(await quotedTotal(page))
  await page.getByLabel('Film', { exact: true }).selectOption('pet-2x188')
  await expect.poll(async () => Number(await quotedTotal(page))).toBeGreaterThan(before)
  await expect(page.getByText('This can be made.')).toBeVisible()
  await page.getByLabel('Note to the maker').fill('For the ash tom.')
  await page.getByRole('button', { name: 'Order this head' }).click()
  await fillAddress(page)
  const total = await quotedTotal(page)
  await page.getByRole('button', { name: `Order and pay €${total}` }).click()

  await expect(page.getByRole('heading', { name: `Pay EUR ${total}` })).toBeVisible()
  await page.getByRole('button', { name: new RegExp(`^Pay EUR.${total}$`) }).click()

  await expect(page.getByText('Paid. A receipt is on its way')).toBeVisible()
  await expect(page).toHaveURL(/\/orders\/[0-9a-f-]{36}$/)
  await expect(page.getByRole('listitem').filter({ hasText: 'Paid' }).first()).toHaveAttribute('aria-current', 'step')
  const number = (await page.getByRole('heading', { level: 1 }).innerText()).replace('Order ', '')
  await expect.poll(async () => {
    const mails = await (await fetch(`${stack.mailInboxUrl}/messages`)).json() as Mail[]
    return mails.find(mail => mail.to === 'player@rimwright.test' && mail.subject === `Receipt for order ${number}`)?.text ?? ''
  }, { timeout: 20_000 }).toContain(`€${total}`)

  const shop = await browser.newContext({ baseURL: stack.baseUrl })
  const desk = await shop.newPage()
  expect((await desk.request.post('/api/auth/sign-in', { data: { email: 'staff@rimwright.test', password: 'drumhead-demo' } })).status()).toBe(200)
  await desk.goto('/orders')
  await desk.getByLabel('Number, name or e-mail').fill(number)
  await desk.getByRole('link', { name: number }).click()
  await expect(desk.getByText('For the ash tom.')).toBeVisible()
  await desk.getByRole('button', { name: 'Start making' }).click()
  await expect(desk.getByRole('button', { name: 'Mark as tuned' })).toBeVisible()
  await shop.close()

  await page.reload()
  await expect(page.getByRole('listitem').filter({ hasText: 'In making' }).first()).toHaveAttribute('aria-current', 'step')
  await expect(page.getByRole('button', { name: 'Cancel the order' })).toHaveCount(0)
})

test('what a visitor has entered stays through signing in', async ({ page }) => {
  await designD3(page)
  await page.getByRole('textbox', { name: 'Note', exact: true }).fill('E3')
  await expect(page.getByRole('heading', { level: 1, name: 'A head that sounds E3' })).toBeVisible()
  await expect(page.getByText('This can be made.')).toBeVisible()
  await page.getByRole('button', { name: 'Order this head' }).click()
  await page.getByLabel('E-mail').fill('player@rimwright.test')
  await page.getByLabel('Password').fill('drumhead-demo')
  await page.getByRole('button', { name: 'Sign in' }).click()
  await expect(page.getByRole('heading', { level: 1, name: 'A head that sounds E3' })).toBeVisible()
  await expect(page.getByLabel('Street and number')).toBeVisible()
})

test('a pitch that this film cannot reach cannot be ordered, and the page names a film that can', async ({ page }) => {
  await designD3(page)
  await page.getByRole('textbox', { name: 'Note', exact: true }).fill('G4')
  await expect(page.getByText(/Clear 250 reaches at most \d+ Hz/)).toBeVisible()
  await expect(page.getByRole('button', { name: 'Order this head' })).toBeDisabled()
  await page.getByRole('button', { name: 'Take Weir Weave 280' }).click()
  await expect(page.getByText('This can be made.')).toBeVisible()
  await expect(page.getByRole('button', { name: 'Order this head' })).toBeEnabled()
})

test('a declined card leaves the order to be paid later, and cancelling it is free', async ({ page, signIn }) => {
  await signIn('player')
  await designD3(page)
  await page.getByRole('button', { name: 'Order this head' }).click()
  await fillAddress(page)
  await page.getByRole('button', { name: /^Order and pay/ }).click()
  await page.getByRole('button', { name: 'Have the card declined' }).click()
  await expect(page.getByText('The card was declined.')).toBeVisible()
  await page.getByRole('link', { name: 'Go back without paying' }).click()
  await expect(page.getByRole('link', { name: 'Pay now' })).toBeVisible()
  await page.getByRole('button', { name: 'Cancel the order' }).click()
  await page.getByRole('button', { name: 'Yes, cancel it' }).click()
  await expect(page.getByRole('listitem').filter({ hasText: 'Cancelled' }).first()).toHaveAttribute('aria-current', 'step')
  await expect(page.getByRole('link', { name: 'Pay now' })).toHaveCount(0)
})
