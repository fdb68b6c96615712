import { z } from 'zod'
import { idSchema, limitSchema, nameSchema, noteSchema } from './common'
import { headTargetSchema } from './turnSheet'

export const headSpecBody = z.object({
  instrumentId: idSchema.nullish(),
  /** From a 3 in hand drum to a concert bass drum of 60 in. */
  diameterMm: z.number('Vibrating diameter is a number in mm.').min(75, 'Vibrating diameter is at least 75 mm.').max(1600, 'Vibrating diameter is at most 1600 mm.'),
  filmId: z.string().min(1, 'Choose a film.').max(60),
  target: headTargetSchema,
  note: noteSchema.nullish(),
})
export type HeadSpecBody = z.infer<typeof headSpecBody>

export const shippingAddressSchema = z.object({
  name: nameSchema,
  line1: nameSchema,
  line2: z.string().trim().max(120).nullish(),
  city: nameSchema,
  postalCode: z.string().trim().min(1, 'Fill this in.').max(20, 'Use at most 20 characters.'),
  country: z.string().trim().toUpperCase().regex(/^[A-Z]{2}$/, 'Use the two-letter country code (ISO 3166-1), like DE.'),
})
export type ShippingAddress = z.infer<typeof shippingAddressSchema>

/** Ten heads fit one parcel of the shop's largest box. */
export const orderBody = z.object({ headSpecIds: z.array(idSchema).min(1, 'Choose a head to order.').max(10, 'Order at most 10 heads at once.'), shippingAddress: shippingAddressSchema })

export const orderStatusSchema = z.enum(['awaiting-payment', 'paid', 'in-making', 'tuned', 'shipped', 'delivered', 'cancelled', 'refunded'])
export type OrderStatus = z.infer<typeof orderStatusSchema>

export const orderStatusBody = z.object({ to: orderStatusSchema, note: noteSchema.optional() })

export const ordersQuery = z.object({
  limit: limitSchema.default(50),
  cursor: z.string().max(200).optional(),
  status: orderStatusSchema.optional(),
  q: z.string().trim().max(100).optional(),
})

export interface PriceLine { label: string, amountMinor: number }
export interface HeadPrice { totalMinor: number, currency: string, lines: PriceLine[] }

export interface HeadSpecView {
  id: string
  instrumentId: string | null
  diameterMm: number
  filmId: string
  filmName: string
  target: z.infer<typeof headTargetSchema>
  note: string | null
  reachable: boolean
  message: string
  predicted: { tensionNPerM: number, fundamentalHz: number, shareOfYield: number, modes: { m: number, n: number, hz: number }[] }
  price: HeadPrice | null
  createdAt: string
}

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
  /** Where to pay; null once nothing is owed. */
  checkoutUrl: string | null
  payments: { amountMinor: number, currency: string, status: string, at: string }[]
  refunds: { amountMinor: number, currency: string, status: string, reason: string, at: string }[]
  history: { at: string, from: OrderStatus | null, to: OrderStatus, by: string, note: string | null }[]
  /** Moves that the person asking may make now. */
  allowedMoves: OrderStatus[]
}
