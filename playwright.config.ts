import { defineConfig, devices } from '@playwright/test'

// Debian's Chromium; Playwright downloads none. --no-sandbox: tests also run as root, where Chromium's sandbox cannot.
const launchOptions = { executablePath: '/usr/bin/chromium', args: ['--no-sandbox', '--disable-dev-shm-usage', '--disable-gpu'] }

export default defineConfig({
  testDir: 'tests/e2e',
  testMatch: '**/*.spec.ts',
  globalSetup: './tests/support/e2e.global.ts',
  // One database and one mailbox: tests in turn.
  workers: 1,
  fullyParallel: false,
  retries: 0,
  forbidOnly: true,
  timeout: 60_000,
  expect: { timeout: 10_000 },
  reporter: [['list']],
  outputDir: 'test-results',
  use: {
    ...devices['Desktop Chrome'],
    launchOptions,
    trace: 'retain-on-failure',
    screenshot: 'only-on-failure',
    locale: 'en-GB',
    timezoneId: 'Europe/Berlin',
  },
  projects: [
    { name: 'desktop', testIgnore: '**/*.phone.spec.ts', use: { viewport: { width: 1440, height: 900 } } },
    { name: 'phone', testMatch: '**/*.phone.spec.ts', use: { viewport: { width: 390, height: 844 }, hasTouch: true, isMobile: true, deviceScaleFactor: 2 } },
  ],
})
