import withNuxt from './.nuxt/eslint.config.mjs'

// Arrows point one way: app and server -> shared/schemas -> shared/acoustics; server/api -> server/utils -> db.
const forbid = (...groups) => ({ 'no-restricted-imports': ['error', { patterns: groups.map(([group, message]) => ({ group, message })) }] })

export default withNuxt(
  { rules: { 'vue/multi-word-component-names': 'off', 'no-console': 'error', '@typescript-eslint/no-explicit-any': 'error' } },
  {
    files: ['shared/**/*.ts'],
    rules: forbid([['vue', 'nuxt*', '#*', 'h3', 'kysely', 'pg', '~/*', '~~/app/*', '~~/server/*', '~~/db/*', '**/server/*', '**/db/*', '**/app/*'], 'shared/ knows no Nuxt, Vue, HTTP or SQL']),
  },
  {
    files: ['shared/acoustics/**/*.ts'],
    rules: { 'no-restricted-imports': ['error', { patterns: [{ regex: '^[^.]|/\\.\\./|^\\.\\.', message: 'shared/acoustics imports nothing but itself' }] }] },
  },
  {
    files: ['app/**/*.{ts,vue}'],
    rules: forbid([['**/shared/**'], 'name it #shared/…: the server build leaves shared/ out of its first stage, where a relative path no longer fits']),
  },
  {
    files: ['server/api/**/*.ts'],
    rules: forbid([['kysely', 'pg', 'stripe', '~~/db/*', '**/db/*'], 'routes hold no SQL and call no service: put it in server/utils']),
  },
  { files: ['db/migrations/**'], rules: { '@typescript-eslint/no-explicit-any': 'off' } },
  { files: ['local/**', 'scripts/**', 'db/seed/**', 'tests/**', 'build/**'], rules: { 'no-console': 'off' } },
  // Playwright reads the names of a fixture's needs from its parameter: one that needs none takes {}.
  { files: ['tests/e2e/**'], rules: { 'no-empty-pattern': ['error', { allowObjectPatternsAsParameters: true }] } },
)
