import { nodeWorkerPlugin } from './build/node-worker-plugin'

export default defineNuxtConfig({
  modules: ['@nuxt/eslint', '@nuxtjs/tailwindcss', '@pinia/nuxt', '@vueuse/nuxt', 'nuxt-auth-utils', 'nuxt-security'],
  components: [{ path: '~/components', pathPrefix: false }],
  imports: { dirs: ['stores'] },
  devtools: { enabled: false },
  app: {
    head: {
      htmlAttrs: { lang: 'en' },
      title: 'Rimwright',
      titleTemplate: '%s',
      meta: [
        { name: 'viewport', content: 'width=device-width, initial-scale=1' },
        { name: 'color-scheme', content: 'light dark' },
      ],
      link: [
        { rel: 'icon', type: 'image/svg+xml', href: '/favicon.svg' },
        { rel: 'preload', as: 'font', type: 'font/woff2', href: '/fonts/bricolage-grotesque.woff2', crossorigin: 'anonymous' },
        { rel: 'preload', as: 'font', type: 'font/woff2', href: '/fonts/instrument-sans.woff2', crossorigin: 'anonymous' },
      ],
    },
  },
  css: ['~/assets/tokens.css', '~/assets/base.css'],
  runtimeConfig: {
    databaseUrl: '',
    dataDir: '',
    publicUrl: '',
    stripeSecretKey: '',
    stripeWebhookSecret: '',
    stripeApiBase: '',
    smtpUrl: '',
    mailFrom: '',
    session: { name: 'rimwright-session', password: '', cookie: { secure: false, sameSite: 'lax' } },
  },
  compatibilityDate: '2026-11-01',
  nitro: {
    preset: 'node-server',
    imports: { dirs: ['server/utils/**'] },
    externals: { inline: ['wavefile'] },
    rollupConfig: { plugins: [nodeWorkerPlugin()] },
    routeRules: { '/fonts/**': { headers: { 'cache-control': 'public, max-age=31536000, immutable' } } },
  },
  vite: {
    optimizeDeps: { include: ['reka-ui', 'vee-validate', 'zod', '@tanstack/vue-table', 'd3-scale', 'd3-shape', 'd3-array'] },
  },
  typescript: {
    strict: true,
    nodeTsConfig: {
      // Unit tests import what app/ computes, and app/ names shared/ this way.
      compilerOptions: { paths: { '#shared/*': ['../shared/*'] } },
      include: ['./types/nitro-imports.d.ts', '../scripts/**/*', '../tests/**/*', '../build/**/*', '../db/**/*', '../local/**/*', '../shared/**/*', '../*.config.ts'],
      exclude: ['../tests/nuxt/**/*'],
    },
  },
  telemetry: false,
  eslint: { config: { stylistic: { semi: false, quotes: 'single', commaDangle: 'always-multiline', braceStyle: '1tbs' } } },
  security: {
    rateLimiter: false,
    requestSizeLimiter: false,
    xssValidator: false,
    corsHandler: false,
    headers: {
      crossOriginEmbedderPolicy: false,
      strictTransportSecurity: false,
      permissionsPolicy: { 'microphone': ['self'], 'screen-wake-lock': ['self'] },
      contentSecurityPolicy: {
        'upgrade-insecure-requests': false,
        'img-src': ['\'self\'', 'data:', 'blob:'],
        'media-src': ['\'self\'', 'blob:'],
        'worker-src': ['\'self\'', 'blob:'],
        'connect-src': ['\'self\''],
        'font-src': ['\'self\''],
      },
    },
  },
})
