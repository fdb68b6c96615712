import type { OrderStatus } from '../../../db/orders.table'
import type { Role } from '../../../shared/types/roles'
import type { Guard, Machine } from './machine'

/** Who moves an order: a person by role, the payment service's word, or a refund that leaves nothing paid. */
export type OrderActor = Role | 'payment' | 'refund'

/** The figures a guard may look at; integer minor units. */
export interface OrderFacts { totalMinor: number, paidMinor: number, refundedMinor: number, disputed: boolean }

type OrderGuard = Guard<OrderFacts>

const paidInFull: OrderGuard = {
  name: 'paidInFull',
  refuse: ({ totalMinor, paidMinor, refundedMinor }) => paidMinor - refundedMinor >= totalMinor ? null : 'The order is not paid in full.',
}

const somethingStillPaid: OrderGuard = {
  name: 'somethingStillPaid',
  refuse: ({ paidMinor, refundedMinor }) => paidMinor - refundedMinor > 0 ? null : 'Everything that was paid has been given back.',
}

const nothingStillPaid: OrderGuard = {
  name: 'nothingStillPaid',
  refuse: ({ paidMinor, refundedMinor }) => paidMinor > 0 && paidMinor === refundedMinor ? null : 'An order is refunded once all that was paid has been given back. Use the refund form.',
}

const notDisputed: OrderGuard = {
  name: 'notDisputed',
  refuse: ({ disputed }) => disputed ? 'The payment is disputed: settle that with the payment service first.' : null,
}

const workshop = ['owner', 'maker', 'staff'] as const

/** The life of an order. A proof reading will guard `tuned` when heads are proved in this house; until then the bench's word holds. */
export const orderMachine: Machine<OrderStatus, OrderActor, OrderFacts> = {
  words: {
    'awaiting-payment': 'awaiting payment', 'paid': 'paid', 'in-making': 'in making', 'tuned': 'tuned', 'shipped': 'shipped',
    'delivered': 'delivered', 'cancelled': 'cancelled', 'refunded': 'refunded',
  },
  transitions: [
    { from: 'awaiting-payment', to: 'paid', by: ['payment'], guards: [paidInFull] },
    { from: 'awaiting-payment', to: 'cancelled', by: ['customer', 'owner', 'staff', 'payment'], guards: [] },
    { from: 'paid', to: 'in-making', by: workshop, guards: [somethingStillPaid, notDisputed] },
    { from: 'paid', to: 'cancelled', by: ['customer', 'owner', 'staff'], guards: [notDisputed] },
    { from: 'in-making', to: 'tuned', by: workshop, guards: [somethingStillPaid] },
    { from: 'tuned', to: 'shipped', by: workshop, guards: [somethingStillPaid, notDisputed] },
    { from: 'shipped', to: 'delivered', by: workshop, guards: [] },
    ...(['paid', 'in-making', 'tuned', 'shipped', 'delivered'] as const).map(from => ({ from, to: 'refunded' as const, by: ['refund'] as const, guards: [nothingStillPaid] })),
  ],
}
