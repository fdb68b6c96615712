import { z } from 'zod'

/**
 * Settings, read once and checked at start-up: a missing secret stops the server instead of weakening it.
 * Each is read by its plain name first, then by the framework's.
 */
const schema = z.object({
  databaseUrl: z.string().min(1, 'DATABASE_URL is not set'),
  dataDir: z.string().min(1, 'DATA_DIR is not set'),
  publicUrl: z.url('PUBLIC_URL is not an address'),
  sessionPassword: z.string().min(32, 'NUXT_SESSION_PASSWORD needs 32 characters or more'),
  stripeSecretKey: z.string().min(1, 'STRIPE_SECRET_KEY is not set'),
  stripeWebhookSecret: z.string().min(1, 'STRIPE_WEBHOOK_SECRET is not set'),
  /** Address of the local payment stand-in; undefined = the real service. */
  stripeApiBase: z.url('STRIPE_API_BASE is not an address').optional(),
  smtpUrl: z.string().regex(/^smtps?:\/\//, 'SMTP_URL starts with smtp:// or smtps://'),
  mailFrom: z.string().min(3, 'MAIL_FROM is not set'),
})
export type Config = z.infer<typeof schema>

let config: Config | undefined

export function getConfig(): Config {
  if (config) return config
  const env = (name: string) => process.env[name] || process.env[`NUXT_${name}`] || undefined
  const parsed = schema.safeParse({
    databaseUrl: env('DATABASE_URL'),
    dataDir: env('DATA_DIR') ?? './.data',
    publicUrl: env('PUBLIC_URL') ?? `http://127.0.0.1:${process.env.PORT || 3000}`,
    sessionPassword: process.env.NUXT_SESSION_PASSWORD,
    stripeSecretKey: env('STRIPE_SECRET_KEY'),
    stripeWebhookSecret: env('STRIPE_WEBHOOK_SECRET'),
    stripeApiBase: env('STRIPE_API_BASE'),
    smtpUrl: env('SMTP_URL'),
    mailFrom: env('MAIL_FROM'),
  })
  if (!parsed.success) throw new Error(`The settings are incomplete: ${parsed.error.issues.map(issue => issue.message).join('; ')}.`)
  return config = parsed.data
}
