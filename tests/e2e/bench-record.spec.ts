import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { benchTap } from '../support/bench-drum'
import { expect, test } from './fixtures'

// Chromium plays this file as the microphone: quiet, a tap, its ring, over and over.
const folder = mkdtempSync(join(tmpdir(), 'rimwright-microphone-'))
const path = join(folder, 'microphone.wav')
writeFileSync(path, benchTap({ quietS: 1.5, ringS: 4 }).wav)

test.use({
  permissions: ['microphone'],
  launchOptions: {
    executablePath: '/usr/bin/chromium',
    args: ['--no-sandbox', '--disable-dev-shm-usage', '--disable-gpu', '--use-fake-ui-for-media-stream', '--use-fake-device-for-media-stream', `--use-file-for-fake-audio-capture=${path}`, '--autoplay-policy=no-user-gesture-required'],
  },
})
test.afterAll(() => rmSync(folder, { recursive: true, force: true }))

test('a maker records a tap in the browser and lands on its reading', async ({ page, signIn }) => {
  await signIn('maker')
  const { items } = await (await page.request.get('/api/instruments?limit=200')).json() as { items: { id: string, construction: string }[] }
  const drum = items.find(item => item.construction === 'open')!
  await page.goto(`/bench?instrument=${drum.id}`, { waitUntil: 'networkidle' })
  await page.getByRole('button', { name: 'Record here' }).click()
  await expect(page.getByRole('meter', { name: 'Level' })).toBeVisible()
  await expect(page).toHaveURL(/\/readings\//, { timeout: 30_000 })
  await expect(page.getByRole('img', { name: /^Waveform of/ })).toBeVisible()
})
