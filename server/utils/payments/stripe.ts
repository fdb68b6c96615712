import Stripe from 'stripe'
import { getConfig } from '../core/config'
import { DomainError } from '../core/errors'
import { log } from '../core/log'

let stripe: Stripe | undefined

/** The official SDK; STRIPE_API_BASE points it at another address, nothing else changes. */
export function useStripe(): Stripe {
  if (stripe) return stripe
  const { stripeSecretKey, stripeApiBase } = getConfig()
  const base = stripeApiBase ? new URL(stripeApiBase) : undefined
  return stripe = new Stripe(stripeSecretKey, {
    maxNetworkRetries: 2, timeout: 20_000, telemetry: false,
    ...(base && { host: base.hostname, port: base.port || (base.protocol === 'https:' ? 443 : 80), protocol: base.protocol === 'https:' ? 'https' as const : 'http' as const }),
  })
}

/** Turns what the payment service refuses into a refusal of ours: its own words stay in the log. */
export async function askPaymentService<T>(what: string, call: (stripe: Stripe) => Promise<T>): Promise<T> {
  try {
    return await call(useStripe())
  } catch (error) {
    if (!(error instanceof Stripe.errors.StripeError)) throw error
    log.error({ type: error.type, code: error.code, requestId: error.requestId, detail: error.message }, `payment service: ${what}`)
    throw new DomainError('payment-service', 'The payment service did not take this just now. Nothing was charged. Try again in a few minutes.')
  }
}
