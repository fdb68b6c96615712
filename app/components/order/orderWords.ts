import type { HeadSpecView, OrderStatus } from '#shared/schemas/order'
import type { Units } from '~/stores/preferences'
import { nearestNote } from '#shared/acoustics/notes'
import { fixed, noteName, withUnit } from '~/utils/figures'
import { formatLength } from '~/utils/units'

/** The way of an order that goes well, in order. */
export const ORDER_WAY: readonly OrderStatus[] = ['awaiting-payment', 'paid', 'in-making', 'tuned', 'shipped', 'delivered']

const WORDS: Record<OrderStatus, string> = {
  'awaiting-payment': 'Awaiting payment', 'paid': 'Paid', 'in-making': 'In making', 'tuned': 'Tuned', 'shipped': 'Shipped',
  'delivered': 'Delivered', 'cancelled': 'Cancelled', 'refunded': 'Refunded',
}
export const statusWords = (status: OrderStatus) => WORDS[status]
export const statusOptions = (Object.keys(WORDS) as OrderStatus[]).map(value => ({ value, label: WORDS[value] }))

/** What the button says that makes the move. */
export const MOVE_WORDS: Partial<Record<OrderStatus, string>> = {
  'in-making': 'Start making', 'tuned': 'Mark as tuned', 'shipped': 'Mark as shipped', 'delivered': 'Mark as delivered',
}

/** 'Clear 250, 13.75 in, to sound D3'. */
export function headWords(head: HeadSpecView, units: Units): string {
  return `${head.filmName}, ${formatLength(head.diameterMm, units)}, ${targetWords(head)}`
}

export function targetWords({ target }: Pick<HeadSpecView, 'target'>): string {
  if (target.kind === 'tension') return `at ${withUnit(fixed(target.nPerM), 'N/m')}`
  const note = nearestNote(target.hz)
  const named = Math.abs(note.cents) < 2 ? noteName(note.name) : withUnit(fixed(target.hz, 1), 'Hz')
  return `to sound ${named}${target.of === 'principal' ? ' at its (1,1)' : ''}`
}
