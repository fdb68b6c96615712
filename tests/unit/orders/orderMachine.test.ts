import { describe, expect, it } from 'vitest'
import type { OrderStatus, PaymentStatus, RefundStatus } from '../../../db/orders.table'
import { allowedMoves, refuseMove } from '../../../server/utils/orders/machine'
import { orderMachine, type OrderActor, type OrderFacts } from '../../../server/utils/orders/orderMachine'
import { paymentMachine, refundMachine } from '../../../server/utils/payments/paymentMachines'

const states = Object.keys(orderMachine.words) as OrderStatus[]
const paid: OrderFacts = { totalMinor: 10_000, paidMinor: 10_000, refundedMinor: 0, disputed: false }
const refuse = (from: OrderStatus, to: OrderStatus, actor: OrderActor, facts: Partial<OrderFacts> = {}) => refuseMove(orderMachine, { from, to, actor, context: { ...paid, ...facts } })

describe('the life of an order', () => {
  it('lets staff, maker and owner take a paid order to delivered, one step after the other', () => {
    for (const actor of ['staff', 'maker', 'owner'] as const) {
      const way: OrderStatus[] = ['paid', 'in-making', 'tuned', 'shipped', 'delivered']
      for (const [index, from] of way.slice(0, -1).entries()) expect(refuse(from, way[index + 1]!, actor), `${actor}: ${from}`).toBeNull()
    }
  })

  it('has exactly the moves that product.md names, whoever asks', () => {
    const actors: OrderActor[] = ['owner', 'maker', 'staff', 'customer', 'payment', 'refund']
    const possible = states.flatMap(from => states.filter(to => actors.some(actor => refuse(from, to, actor, to === 'refunded' ? { refundedMinor: 10_000 } : {}) === null)).map(to => `${from} > ${to}`))
    expect(possible.sort()).toEqual([
      'awaiting-payment > cancelled', 'awaiting-payment > paid', 'delivered > refunded', 'in-making > refunded', 'in-making > tuned', 'paid > cancelled',
      'paid > in-making', 'paid > refunded', 'shipped > delivered', 'shipped > refunded', 'tuned > refunded', 'tuned > shipped',
    ])
  })

  it('calls an order paid on the payment service\'s word alone, and only in full', () => {
    expect(refuse('awaiting-payment', 'paid', 'payment')).toBeNull()
    expect(refuse('awaiting-payment', 'paid', 'payment', { paidMinor: 9_999 })).toContain('not paid in full')
    expect(refuse('awaiting-payment', 'paid', 'payment', { refundedMinor: 1 })).toContain('not paid in full')
    for (const actor of ['owner', 'maker', 'staff', 'customer'] as const) expect(refuse('awaiting-payment', 'paid', actor), actor).toContain('not yours')
  })

  it('lets a customer cancel until making starts, and do nothing else', () => {
    const mine = (from: OrderStatus) => allowedMoves(orderMachine, { from, actor: 'customer', context: paid })
    expect(mine('awaiting-payment')).toEqual(['cancelled'])
    expect(mine('paid')).toEqual(['cancelled'])
    for (const from of ['in-making', 'tuned', 'shipped', 'delivered', 'cancelled', 'refunded'] as const) expect(mine(from), from).toEqual([])
  })

  it('says what must come first when a step is skipped', () => {
    expect(refuse('in-making', 'shipped', 'staff')).toBe('This is in making, so it cannot become shipped. Shipped follows tuned.')
    expect(refuse('cancelled', 'in-making', 'owner')).toContain('Nothing follows cancelled')
    expect(refuse('paid', 'paid', 'staff')).toBe('This is paid already.')
  })

  it('keeps a disputed order off the bench and out of the post', () => {
    expect(refuse('paid', 'in-making', 'staff', { disputed: true })).toContain('disputed')
    expect(refuse('tuned', 'shipped', 'staff', { disputed: true })).toContain('disputed')
    expect(refuse('paid', 'cancelled', 'customer', { disputed: true })).toContain('disputed')
  })

  it('does not make or ship what has been given back, and calls it refunded only when all is', () => {
    expect(refuse('paid', 'in-making', 'staff', { refundedMinor: 10_000 })).toContain('given back')
    expect(refuse('tuned', 'shipped', 'staff', { refundedMinor: 10_000 })).toContain('given back')
    expect(refuse('in-making', 'refunded', 'refund', { refundedMinor: 9_999 })).toContain('all that was paid')
    expect(refuse('in-making', 'refunded', 'staff', { refundedMinor: 10_000 })).toContain('not yours')
  })

  it('names every guard', () => {
    for (const { guards } of orderMachine.transitions) for (const guard of guards) expect(guard.name).toMatch(/^[a-z][A-Za-z]+$/)
  })
})

describe('the life of a payment', () => {
  const moves = (from: PaymentStatus) => allowedMoves(paymentMachine, { from, actor: 'payment', context: null })
  it('ends when the money has arrived, and may arrive after the bank first refused', () => {
    expect({ pending: moves('pending'), succeeded: moves('succeeded'), failed: moves('failed') }).toEqual({ pending: ['succeeded', 'failed'], succeeded: [], failed: ['succeeded'] })
  })
})

describe('the life of a refund', () => {
  const moves = (from: RefundStatus) => allowedMoves(refundMachine, { from, actor: 'payment', context: null })
  it('can be sent back by the customer\'s bank even when it had succeeded', () => {
    expect({ pending: moves('pending'), succeeded: moves('succeeded'), failed: moves('failed') }).toEqual({ pending: ['succeeded', 'failed'], succeeded: ['failed'], failed: [] })
  })
})
