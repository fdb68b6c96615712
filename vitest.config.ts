import { fileURLToPath } from 'node:url'
import { defineConfig } from 'vitest/config'

// As Nuxt names it. Files of app/ must import shared/ by this name: the server build leaves shared/ out of its first
// stage, and a relative path no longer fits where the second stage finds the first one's output.
const alias = { '#shared': fileURLToPath(new URL('./shared', import.meta.url)) }

// "unit" needs nothing but Node; "server" talks to a built app and a real PostgreSQL that its globalSetup starts.
export default defineConfig({
  test: {
    projects: [
      {
        resolve: { alias },
        test: {
          name: 'unit',
          environment: 'node',
          include: ['tests/unit/**/*.test.ts'],
          testTimeout: 60_000,
          server: { deps: { inline: ['wavefile'] } },
        },
      },
      {
        resolve: { alias },
        test: {
          name: 'server',
          environment: 'node',
          include: ['tests/server/**/*.test.ts'],
          globalSetup: ['tests/support/stack.global.ts'],
          testTimeout: 60_000,
          hookTimeout: 120_000,
          server: { deps: { inline: ['wavefile'] } },
        },
      },
    ],
  },
})
