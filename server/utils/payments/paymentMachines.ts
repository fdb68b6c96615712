import type { PaymentStatus, RefundStatus } from '../../../db/orders.table'
import type { Machine } from '../orders/machine'

/** Money moves on the payment service's word alone. */
export type MoneyActor = 'payment'

/** A bank debit or transfer is pending until the bank says. What failed may still arrive late; what arrived stays. */
export const paymentMachine: Machine<PaymentStatus, MoneyActor, null> = {
  words: { pending: 'pending', succeeded: 'paid', failed: 'failed' },
  transitions: [
    { from: 'pending', to: 'succeeded', by: ['payment'], guards: [] },
    { from: 'pending', to: 'failed', by: ['payment'], guards: [] },
    { from: 'failed', to: 'succeeded', by: ['payment'], guards: [] },
  ],
}

/** The customer's bank can send a refund back even after it was said to have succeeded; a failed one stays failed. */
export const refundMachine: Machine<RefundStatus, MoneyActor, null> = {
  words: { pending: 'on its way', succeeded: 'given back', failed: 'failed' },
  transitions: [
    { from: 'pending', to: 'succeeded', by: ['payment'], guards: [] },
    { from: 'pending', to: 'failed', by: ['payment'], guards: [] },
    { from: 'succeeded', to: 'failed', by: ['payment'], guards: [] },
  ],
}
