import { z } from 'zod'
import type { constructionSchema } from './instrument'
import { idSchema, limitSchema, nameSchema, noteSchema, numeric } from './common'
import type { PriceLineKind } from './prices'

/** From a 3 in hand drum to a concert bass drum of 60 in. */
const specDiameterMm = z.number('Vibrating diameter is a number in mm.').min(75, 'Vibrating diameter is at least 75 mm.').max(1600, 'Vibrating diameter is at most 1600 mm.')
const filmId = z.string('Choose a film.').min(1, 'Choose a film.').max(60)
const countryCode = z.string('Choose a country.').trim().toUpperCase().regex(/^[A-Z]{2}$/, 'Use the two-letter country code (ISO 3166-1), like DE.')

/** What the head shall sound like. `of`: its (0,1) where left out, or for a kettle the principal tone (1,1), which is what a player tunes by. */
export const specTargetSchema = z.discriminatedUnion('kind', [
  z.object({
    kind: z.literal('pitch'),
    /** 20 Hz to 2 kHz: below and above the (0,1) of anything with rods. */
    hz: z.number('Pitch is a number in Hz.').min(20, 'Pitch is at least 20 Hz.').max(2000, 'Pitch is at most 2000 Hz.'),
    of: z.enum(['fundamental', 'principal']).optional(),
  }),
  /** 50 N/m hangs loose; 20 kN/m is past any film's yield. */
  z.object({ kind: z.literal('tension'), nPerM: z.number('Tension is a number in N/m.').min(50, 'Tension is at least 50 N/m.').max(20_000, 'Tension is at most 20 000 N/m.') }),
], 'Choose a target: a pitch in Hz or a tension in N/m.')
export type SpecTarget = z.infer<typeof specTargetSchema>

export const headSpecBody = z.object({
  instrumentId: idSchema.nullish(),
  /** An instrument brings its own; needed without one. */
  diameterMm: specDiameterMm.nullish(),
  filmId,
  target: specTargetSchema,
  note: noteSchema.nullish(),
}).superRefine((spec, context) => {
  if (!spec.instrumentId && spec.diameterMm == null) context.addIssue({ code: 'custom', path: ['diameterMm'], message: 'Give the vibrating diameter in mm, or choose an instrument.' })
})
export type HeadSpecBody = z.infer<typeof headSpecBody>

export const quoteQuery = z.object({
  filmId,
  diameterMm: numeric('Vibrating diameter is a number in mm.').pipe(specDiameterMm),
  country: countryCode.optional(),
})

export const shippingAddressSchema = z.object({
  name: nameSchema,
  line1: nameSchema,
  line2: z.string().trim().max(120).nullish(),
  city: nameSchema,
  postalCode: z.string().trim().min(1, 'Fill this in.').max(20, 'Use at most 20 characters.'),
  country: countryCode,
})
export type ShippingAddress = z.infer<typeof shippingAddressSchema>

/** Ten heads fit one parcel of the shop's largest box. */
export const orderBody = z.object({
  headSpecIds: z.array(idSchema).min(1, 'Choose a head to order.').max(10, 'Order at most 10 heads at once.')
    .refine(ids => new Set(ids).size === ids.length, 'Each head stands once in an order.'),
  shippingAddress: shippingAddressSchema,
})
export type OrderBody = z.infer<typeof orderBody>

export const orderStatusSchema = z.enum(['awaiting-payment', 'paid', 'in-making', 'tuned', 'shipped', 'delivered', 'cancelled', 'refunded'])
export type OrderStatus = z.infer<typeof orderStatusSchema>

export const orderStatusBody = z.object({ to: orderStatusSchema, note: noteSchema.optional() })

/** Nobody pays more than a million for a head; the true bound is what was paid and not yet given back. */
export const refundBody = z.object({
  amountMinor: z.number('Write the amount to give back.').int('The amount is in whole cents.').min(1, 'Give back at least 0.01.').max(100_000_000, 'This is more than was paid.'),
  reason: z.string('Say why: the customer sees it.').trim().min(3, 'Say why: the customer sees it.').max(500, 'Use at most 500 characters.'),
})
export type RefundBody = z.infer<typeof refundBody>

export const ordersQuery = z.object({
  limit: limitSchema.default(50),
  cursor: z.string().max(200).optional(),
  status: orderStatusSchema.optional(),
  overdue: z.enum(['true', 'false']).transform(text => text === 'true').optional(),
  q: z.string().trim().max(100).optional(),
})

/** Lines sum to the total; VAT is among them. */
export interface PriceLine { kind: PriceLineKind, label: string, amountMinor: number }
export interface HeadPrice { totalMinor: number, currency: string, lines: PriceLine[] }

export interface QuoteView extends HeadPrice {
  zone: string
  /** Day until which this price holds. */
  validUntil: string
  /** From payment to dispatch, calendar days. */
  makingDays: number
}

export interface HeadSpecView {
  id: string
  instrumentId: string | null
  instrumentName: string | null
  /** The air that the prediction assumes; 'fixture' for a bare diameter, because the head is proved there. */
  construction: z.infer<typeof constructionSchema>
  diameterMm: number
  filmId: string
  filmName: string
  target: SpecTarget
  note: string | null
  reachable: boolean
  message: string
  predicted: { tensionNPerM: number, fundamentalHz: number, shareOfYield: number, modes: { m: number, n: number, hz: number }[] }
  price: HeadPrice | null
  /** Day until which the price holds; null when unreachable. */
  validUntil: string | null
  createdAt: string
}

/** One row of an order list. */
export interface OrderRowView {
  id: string
  number: string
  status: OrderStatus
  totalMinor: number
  currency: string
  customer: { id: string, name: string }
  /** What is made, in a few words. */
  heads: string[]
  createdAt: string
  dueOn: string | null
  /** Due before today and not yet shipped. */
  overdue: boolean
  /** Something that a person must look at; staff only. */
  attention: string | null
}
export interface OrdersPage { items: OrderRowView[], total: number, next: string | null }

export interface OrderView {
  id: string
  number: string
  status: OrderStatus
  totalMinor: number
  currency: string
  lines: PriceLine[]
  shippingAddress: ShippingAddress
  customer: { id: string, name: string, email: string }
  heads: HeadSpecView[]
  createdAt: string
  dueOn: string | null
  overdue: boolean
  /** Something that a person must look at, in words; null for customers. */
  attention: string | null
  /** Sum of what arrived, and of what of it was given back or is on its way back. */
  paidMinor: number
  refundedMinor: number
  /** Where to pay; null once nothing is owed. */
  checkoutUrl: string | null
  payments: { id: string, amountMinor: number, currency: string, status: string, at: string }[]
  refunds: { id: string, amountMinor: number, currency: string, status: string, reason: string, at: string }[]
  history: { at: string, from: OrderStatus | null, to: OrderStatus, by: string, note: string | null }[]
  /** Moves that the person asking may make now. */
  allowedMoves: OrderStatus[]
  mayRefund: boolean
}
