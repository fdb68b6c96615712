import { randomUUID } from 'node:crypto'
import type { StackInfo } from '../support/stack-client'
import { expect, test } from './fixtures'

interface Letter { to: string, subject: string, text: string }

/** The newest letter to an address with that subject, waited for. */
async function letterTo(stack: StackInfo, address: string, subject: string): Promise<Letter> {
  let found: Letter | undefined
  await expect.poll(async () => {
    const letters = await (await fetch(`${stack.mailInboxUrl}/messages`)).json() as Letter[]
    found = letters.find(letter => letter.to.includes(address) && letter.subject === subject)
    return Boolean(found)
  }, { timeout: 20_000 }).toBe(true)
  return found!
}
const linkIn = (letter: Letter) => /https?:\/\/\S+token=\S+/.exec(letter.text)![0]
const PASSWORD = 'a-drum-key-and-a-rag'

test.describe('an account', () => {
  // Signing in before the address is confirmed is answered with 403, which the browser logs.
  test.use({ allowedErrors: [/403/] })

  test('is opened, confirmed by mail and used', async ({ page, stack }) => {
    const email = `ilse-${randomUUID().slice(0, 8)}@rimwright.test`
    await page.goto('/sign-up', { waitUntil: 'networkidle' })
    await page.getByLabel('Name').fill('Ilse Brandt')
    await page.getByLabel('E-mail').fill(email)
    await page.getByLabel('Password').fill(PASSWORD)
    await page.getByRole('button', { name: 'Open the account' }).click()
    await expect(page.getByRole('heading', { name: 'Look in your mail' })).toBeVisible()

    await page.getByRole('main').getByRole('link', { name: 'To sign in' }).click()
    await page.getByLabel('E-mail').fill(email)
    await page.getByLabel('Password').fill(PASSWORD)
    await page.getByRole('button', { name: 'Sign in' }).click()
    await expect(page.getByRole('alert')).toContainText('Confirm your e-mail address first')

    await page.goto(linkIn(await letterTo(stack, email, 'Confirm your e-mail address')), { waitUntil: 'networkidle' })
    await page.getByRole('button', { name: 'Confirm this address' }).click()
    await page.getByRole('main').getByRole('link', { name: 'Sign in' }).click()
    await page.getByLabel('E-mail').fill(email)
    await page.getByLabel('Password').fill(PASSWORD)
    await page.getByRole('button', { name: 'Sign in' }).click()
    await expect(page.getByRole('banner').getByRole('link', { name: 'My instruments' })).toBeVisible()
    await expect(page.getByRole('banner').getByRole('link', { name: 'Histories' })).toHaveCount(0)
  })
})

test.describe('a form', () => {
  test.use({ allowedErrors: [/409|401/] })

  test('keeps what was typed and says beside the field what is wrong', async ({ page }) => {
    await page.goto('/sign-up', { waitUntil: 'networkidle' })
    await page.getByLabel('Name').fill('Ilse Brandt')
    await page.getByLabel('E-mail').fill('nobody')
    await page.getByLabel('Password').fill('short')
    await page.getByRole('button', { name: 'Open the account' }).click()
    await expect(page.getByText('Write the e-mail address in full')).toBeVisible()
    await expect(page.getByText('Use at least 10 characters.')).toBeVisible()
    await expect(page.getByLabel('Name')).toHaveValue('Ilse Brandt')
    await expect(page.getByLabel('E-mail')).toHaveAttribute('aria-invalid', 'true')

    await page.getByLabel('E-mail').fill('player@rimwright.test')
    await page.getByLabel('Password').fill(PASSWORD)
    await page.getByRole('button', { name: 'Open the account' }).click()
    await expect(page.getByText('This address has an account already.')).toBeVisible()
    await expect(page.getByRole('main').getByRole('link', { name: 'Ask for a new password' })).toBeVisible()
  })

  test('to sign in refuses a wrong password in words', async ({ page }) => {
    await page.goto('/sign-in', { waitUntil: 'networkidle' })
    await page.getByLabel('E-mail').fill(`nobody-${randomUUID().slice(0, 8)}@rimwright.test`)
    await page.getByLabel('Password').fill('a wrong password')
    await page.getByRole('button', { name: 'Sign in' }).click()
    await expect(page.getByRole('alert')).toHaveText('This e-mail address and password do not belong together.')
  })
})

test('a forgotten password is set anew by mail', async ({ page, stack, signIn }) => {
  await signIn('owner')
  const email = `maker-${randomUUID().slice(0, 8)}@rimwright.test`
  await page.goto('/people', { waitUntil: 'networkidle' })
  await page.getByRole('button', { name: 'Invite somebody' }).click()
  await page.getByLabel('Name').fill('Second Maker')
  await page.getByRole('form', { name: 'Invitation' }).getByLabel('E-mail').fill(email)
  await page.getByRole('form', { name: 'Invitation' }).getByLabel('Role').selectOption('maker')
  await page.getByRole('button', { name: 'Send the invitation', exact: true }).click()
  await expect(page.getByText(`A letter is on its way to ${email}`)).toBeVisible()
  await page.request.post('/api/auth/sign-out')

  await page.goto(linkIn(await letterTo(stack, email, 'You are invited to Rimwright')), { waitUntil: 'networkidle' })
  await page.getByLabel('New password').fill(PASSWORD)
  await page.getByRole('button', { name: 'Set the password' }).click()
  await expect(page.getByRole('heading', { name: 'The new password holds' })).toBeVisible()

  await page.goto('/forgot-password', { waitUntil: 'networkidle' })
  await page.getByLabel('E-mail').fill(email)
  await page.getByRole('button', { name: 'Send the link' }).click()
  await expect(page.getByRole('heading', { name: 'Look in your mail' })).toBeVisible()
  await page.goto(linkIn(await letterTo(stack, email, 'Choose a new password')), { waitUntil: 'networkidle' })
  await page.getByLabel('New password').fill(`${PASSWORD}-anew`)
  await page.getByRole('button', { name: 'Set the password' }).click()
  await page.getByRole('main').getByRole('link', { name: 'Sign in' }).click()
  await page.getByLabel('E-mail').fill(email)
  await page.getByLabel('Password').fill(`${PASSWORD}-anew`)
  await page.getByRole('button', { name: 'Sign in' }).click()
  await expect(page.getByRole('banner').getByRole('link', { name: 'Bench' })).toBeVisible()
})

test.describe('signing out everywhere', () => {
  // The ended session's next request is refused with 401, which the browser logs.
  test.use({ allowedErrors: [/401/] })

  test('ends the session of another browser, which says so and leads back', async ({ page, signIn, browser, stack }) => {
    const elsewhere = await browser.newContext({ baseURL: stack.baseUrl })
    const other = await elsewhere.newPage()
    const account = { email: 'staff@rimwright.test', password: 'drumhead-demo' }
    await elsewhere.request.post('/api/auth/sign-in', { data: account })
    await other.goto('/histories?sort=tension', { waitUntil: 'networkidle' })

    await signIn('staff')
    await page.goto('/account', { waitUntil: 'networkidle' })
    await page.getByRole('button', { name: 'Sign out everywhere' }).click()
    await expect(page).toHaveURL(/\/sign-in$/)

    await other.getByRole('button', { name: 'Read on' }).click()
    await expect(other).toHaveURL(/\/sign-in\?/)
    await expect(other.getByText('Your session has ended')).toBeVisible()
    await other.getByLabel('E-mail').fill(account.email)
    await other.getByLabel('Password').fill(account.password)
    await other.getByRole('button', { name: 'Sign in' }).click()
    await expect(other).toHaveURL(/\/histories\?sort=/)
    await elsewhere.close()
  })
})

test('an owner closes an account and opens it again', async ({ page, signIn, stack }) => {
  const name = `Closed ${randomUUID().slice(0, 8)}`
  const email = `${name.replace(' ', '-').toLowerCase()}@rimwright.test`
  await signIn('owner')
  await page.request.post('/api/people/invitations', { data: { name, email, role: 'staff' } })
  await letterTo(stack, email, 'You are invited to Rimwright')
  await page.goto('/people', { waitUntil: 'networkidle' })
  await page.getByLabel('Find').fill(email)
  await page.getByRole('button', { name: `Change the account of ${name}` }).click()
  await page.getByRole('button', { name: 'Close the account' }).click()
  await expect(page.getByText('account closed')).toBeVisible()
  await page.getByRole('button', { name: `Change the account of ${name}` }).click()
  await page.getByRole('button', { name: 'Open the account again' }).click()
  await expect(page.getByText('account closed')).toHaveCount(0)
})
