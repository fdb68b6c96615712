import { z } from 'zod'

// Parameters of POST /v1/checkout/sessions that the stand-in models, by docs.stripe.com/api/checkout/sessions/create. Bodies
// are form-encoded, so every value arrives as text. Objects are strict: a parameter that is not modelled is refused
// rather than ignored, so that code which relies on it does not pass here and surprise with the real service.

const text = z.string()
const flag = z.enum(['true', 'false']).transform(value => value === 'true')
const integer = z.string().regex(/^-?\d+$/, 'Invalid integer').transform(Number)
// Limits of metadata by docs.stripe.com/api/metadata.
const metadata = z.record(z.string().max(40), z.string().max(500)).refine(value => Object.keys(value).length <= 50, 'at most 50 keys')
const currency = z.string().regex(/^[a-zA-Z]{3}$/, 'Invalid currency').transform(value => value.toLowerCase())
const webUrl = z.string().regex(/^https?:\/\/\S+$/, 'Not a valid URL')
const address = z.strictObject({
  line1: text.optional(), line2: text.optional(), city: text.optional(), state: text.optional(), postal_code: text.optional(), country: text.optional(),
})

const priceData = z.strictObject({
  currency,
  product_data: z.strictObject({
    name: text.min(1), description: text.optional(), images: z.array(text).max(8).optional(), metadata: metadata.optional(),
    tax_code: text.optional(), unit_label: text.optional(),
  }),
  unit_amount: integer.refine(value => value >= 0 && value <= 99_999_999, 'must be at least 0 and at most 99999999'),
  tax_behavior: z.enum(['exclusive', 'inclusive', 'unspecified']).optional(),
})

const deliveryBound = z.strictObject({ unit: z.enum(['hour', 'day', 'business_day', 'week', 'month']), value: integer })
const shippingRateData = z.strictObject({
  display_name: text.min(1).max(100),
  type: z.literal('fixed_amount').optional(),
  fixed_amount: z.strictObject({ amount: integer, currency }),
  delivery_estimate: z.strictObject({ minimum: deliveryBound.optional(), maximum: deliveryBound.optional() }).optional(),
  tax_behavior: z.enum(['exclusive', 'inclusive', 'unspecified']).optional(),
  tax_code: text.optional(),
  metadata: metadata.optional(),
})

export const createSessionInput = z.strictObject({
  mode: z.literal('payment', 'the stand-in models the mode payment only'),
  line_items: z.array(z.strictObject({ price_data: priceData, quantity: integer.refine(value => value > 0, 'must be 1 or more'), metadata: metadata.optional() })).min(1).max(100),
  shipping_options: z.array(z.strictObject({ shipping_rate_data: shippingRateData })).max(5).optional(),
  success_url: webUrl,
  cancel_url: webUrl.optional(),
  client_reference_id: text.max(200).optional(),
  customer_email: z.email('Invalid email address').max(800).optional(),
  metadata: metadata.optional(),
  expires_at: integer.optional(),
  payment_intent_data: z.strictObject({
    description: text.optional(), metadata: metadata.optional(), receipt_email: text.optional(),
    statement_descriptor: text.optional(), statement_descriptor_suffix: text.optional(),
    shipping: z.strictObject({ name: text, phone: text.optional(), carrier: text.optional(), tracking_number: text.optional(), address }).optional(),
  }).optional(),
  payment_method_types: z.array(text).optional(),
  locale: text.optional(),
  submit_type: z.enum(['auto', 'book', 'donate', 'pay']).optional(),
  ui_mode: z.literal('hosted_page').optional(),
  billing_address_collection: z.enum(['auto', 'required']).optional(),
  customer_creation: z.enum(['always', 'if_required']).optional(),
  currency: currency.optional(),
  automatic_tax: z.strictObject({ enabled: z.literal('false', 'the stand-in computes no tax: send it as a line item') }).optional(),
  allow_promotion_codes: flag.optional(),
  expand: z.array(text).optional(),
})
export type CreateSessionInput = z.infer<typeof createSessionInput>

export const createRefundInput = z.strictObject({
  payment_intent: text.optional(),
  charge: text.optional(),
  amount: integer.optional(),
  reason: z.enum(['duplicate', 'fraudulent', 'requested_by_customer']).optional(),
  metadata: metadata.optional(),
  expand: z.array(text).optional(),
})
export type CreateRefundInput = z.infer<typeof createRefundInput>

/** Query of a list, by docs.stripe.com/api/pagination. */
export const listInput = z.object({
  limit: integer.refine(value => value >= 1 && value <= 100, 'must be between 1 and 100').default(10),
  starting_after: text.optional(),
  ending_before: text.optional(),
  type: text.optional(),
  types: z.array(text).optional(),
  payment_intent: text.optional(),
  status: text.optional(),
})
export type ListInput = z.infer<typeof listInput>
