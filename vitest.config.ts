import { defineConfig } from 'vitest/config'

// "unit" needs nothing but Node; "server" talks to a built app and a real PostgreSQL that its globalSetup starts.
export default defineConfig({
  test: {
    projects: [
      {
        test: {
          name: 'unit',
          environment: 'node',
          include: ['tests/unit/**/*.test.ts'],
          testTimeout: 60_000,
          server: { deps: { inline: ['wavefile'] } },
        },
      },
      {
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
