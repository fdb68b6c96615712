import Stripe from 'stripe'
import { invalidRequest, noSuch } from './apiError'
import { newId, type BookContent, type BookedSession } from './book'
import type { CreateSessionInput } from './sessionInput'

// Bounds of expires_at by docs.stripe.com/api/checkout/sessions/create: 30 minutes to 24 hours from creation.
const MIN_LIFE_S = 30 * 60
const MAX_LIFE_S = 24 * 3600
// Smallest charge in minor units for currencies of two decimals, by docs.stripe.com/currencies#minimum-and-maximum-charge-amounts.
const MIN_CHARGE_MINOR: Record<string, number> = { eur: 50, usd: 50, chf: 50, gbp: 30, cad: 50, aud: 50, sek: 300, nok: 300, dkk: 250 }

/** Builds a checkout session with its line items; changes nothing else. */
export function createSession(input: CreateSessionInput, base: string, nowS: number): BookedSession {
  const id = newId('cs_test_', 58)
  const currency = input.line_items[0]!.price_data.currency
  const shipping = input.shipping_options?.[0]?.shipping_rate_data.fixed_amount
  const currencies = [...input.line_items.map(item => item.price_data.currency), ...(input.shipping_options ?? []).map(option => option.shipping_rate_data.fixed_amount.currency)]
  if (currencies.some(other => other !== currency)) {
    throw invalidRequest('All prices on a Checkout Session must have the same currency.', { param: 'line_items' })
  }
  const expiresAt = input.expires_at ?? nowS + MAX_LIFE_S
  // A minute of slack: the caller's clock read the time before the request travelled.
  if (expiresAt < nowS + MIN_LIFE_S - 60) throw invalidRequest('The `expires_at` timestamp must be at least 30 minutes from Checkout Session creation.', { param: 'expires_at' })
  if (expiresAt > nowS + MAX_LIFE_S + 60) throw invalidRequest('The `expires_at` timestamp must be less than 24 hours from Checkout Session creation.', { param: 'expires_at' })

  const lineItems = input.line_items.map(item => lineItem(item, nowS))
  const subtotal = lineItems.reduce((sum, item) => sum + item.amount_total, 0)
  const total = subtotal + (shipping?.amount ?? 0)
  if (total < (MIN_CHARGE_MINOR[currency] ?? 1)) {
    throw invalidRequest('The Checkout Session\'s total amount due is below the smallest that can be charged in this currency.', { code: 'amount_too_small' })
  }
  const rates = (input.shipping_options ?? []).map(option => shippingRate(option.shipping_rate_data, nowS))
  const session: Stripe.Checkout.Session = {
    ...emptySession(),
    id,
    amount_subtotal: subtotal,
    amount_total: total,
    allow_promotion_codes: input.allow_promotion_codes ?? null,
    billing_address_collection: input.billing_address_collection ?? null,
    cancel_url: input.cancel_url ?? null,
    client_reference_id: input.client_reference_id ?? null,
    created: nowS,
    currency,
    customer_creation: input.customer_creation ?? 'if_required',
    customer_details: input.customer_email ? customerDetails(input.customer_email) : null,
    customer_email: input.customer_email ?? null,
    expires_at: expiresAt,
    locale: input.locale ?? null,
    metadata: input.metadata ?? {},
    payment_method_types: input.payment_method_types ?? ['card'],
    shipping_cost: shipping ? { amount_subtotal: shipping.amount, amount_tax: 0, amount_total: shipping.amount, shipping_rate: rates[0]!.id } : null,
    shipping_options: rates.map(rate => ({ shipping_amount: rate.fixed_amount?.amount ?? 0, shipping_rate: rate.id })),
    submit_type: input.submit_type ?? null,
    success_url: input.success_url,
    total_details: { amount_discount: 0, amount_shipping: shipping?.amount ?? 0, amount_tax: 0 },
    url: `${base}/pay/${id}`,
  }
  const { description, metadata, receipt_email } = input.payment_intent_data ?? {}
  return { session, lineItems, intentData: { description, metadata, receipt_email } }
}

export function getSession(book: BookContent, id: string): BookedSession {
  const booked = book.sessions[id]
  if (!booked) throw noSuch('checkout.session', id, 'session')
  return booked
}

/** @throws ApiError when the session is not open, as the API does */
export function expireSession(booked: BookedSession): void {
  const { session } = booked
  if (session.status !== 'open') {
    throw invalidRequest(`Only Checkout Sessions with a status in ["open"] can be expired. This Checkout Session has a status of ${session.status}.`)
  }
  session.status = 'expired'
  session.url = null
}

export function customerDetails(email: string | null): Stripe.Checkout.Session.CustomerDetails {
  return { address: null, business_name: null, email, individual_name: null, name: null, phone: null, tax_exempt: 'none', tax_ids: [] }
}

function lineItem(item: CreateSessionInput['line_items'][number], nowS: number): Stripe.LineItem {
  const { currency, unit_amount: unitAmount, product_data: product, tax_behavior: taxBehavior } = item.price_data
  const amount = unitAmount * item.quantity
  return {
    id: newId('li_'), object: 'item', adjustable_quantity: null, amount_discount: 0, amount_subtotal: amount, amount_tax: 0, amount_total: amount,
    currency, description: product.name, metadata: item.metadata ?? {}, quantity: item.quantity,
    price: {
      id: newId('price_'), object: 'price', active: false, billing_scheme: 'per_unit', created: nowS, currency, custom_unit_amount: null, livemode: false,
      lookup_key: null, metadata: {}, nickname: null, product: newId('prod_', 14), recurring: null, tax_behavior: taxBehavior ?? 'unspecified', tiers_mode: null,
      transform_quantity: null, type: 'one_time', unit_amount: unitAmount, unit_amount_decimal: Stripe.Decimal.from(unitAmount),
    },
  }
}

type ShippingRateData = NonNullable<CreateSessionInput['shipping_options']>[number]['shipping_rate_data']

function shippingRate(data: ShippingRateData, nowS: number): Stripe.ShippingRate {
  const { minimum, maximum } = data.delivery_estimate ?? {}
  return {
    id: newId('shr_'), object: 'shipping_rate', active: false, created: nowS, display_name: data.display_name, fixed_amount: data.fixed_amount, livemode: false,
    delivery_estimate: data.delivery_estimate ? { minimum: minimum ?? null, maximum: maximum ?? null } : null,
    metadata: data.metadata ?? {}, tax_behavior: data.tax_behavior ?? 'unspecified', tax_code: data.tax_code ?? null, type: 'fixed_amount',
  }
}

function emptySession(): Omit<Stripe.Checkout.Session, 'id' | 'created' | 'expires_at' | 'payment_method_types' | 'shipping_options'> {
  return {
    object: 'checkout.session', adaptive_pricing: null, after_expiration: null, allow_promotion_codes: null, allowed_payment_method_types: null,
    amount_subtotal: null, amount_total: null, automatic_tax: { enabled: false, liability: null, provider: null, status: null },
    billing_address_collection: null, cancel_url: null, client_reference_id: null, client_secret: null, collected_information: null, consent: null,
    consent_collection: null, currency: null, currency_conversion: null, custom_fields: [],
    custom_text: { after_submit: null, shipping_address: null, submit: null, terms_of_service_acceptance: null },
    customer: null, customer_account: null, customer_creation: null, customer_details: null, customer_email: null, discounts: [],
    integration_identifier: null, invoice: null, invoice_creation: null, livemode: false, locale: null, managed_payments: null, metadata: {}, mode: 'payment',
    origin_context: null, payment_intent: null, payment_link: null, payment_method_collection: 'if_required', payment_method_configuration_details: null,
    payment_method_options: {}, payment_status: 'unpaid', permissions: null, recovered_from: null, saved_payment_method_options: null, setup_intent: null,
    shipping_address_collection: null, shipping_cost: null, status: 'open', submit_type: null, subscription: null, success_url: null, total_details: null,
    ui_mode: 'hosted_page', url: null, wallet_options: null,
  }
}
