import type Stripe from 'stripe'
import { invalidRequest, noSuch } from './apiError'
import type { BookContent, BookedSession } from './book'
import type { ListInput } from './sessionInput'

/** A page of a list, newest first as given, by docs.stripe.com/api/pagination. */
export function page<T extends { id: string }>(all: T[], input: ListInput, url: string): { object: 'list', data: T[], has_more: boolean, url: string } {
  const at = (id: string) => {
    const index = all.findIndex(item => item.id === id)
    if (index < 0) throw noSuch('object', id, 'starting_after')
    return index
  }
  if (input.ending_before) {
    const end = at(input.ending_before)
    const start = Math.max(0, end - input.limit)
    return { object: 'list', data: all.slice(start, end), has_more: start > 0, url }
  }
  const start = input.starting_after ? at(input.starting_after) + 1 : 0
  return { object: 'list', data: all.slice(start, start + input.limit), has_more: all.length > start + input.limit, url }
}

export function expandSession(book: BookContent, booked: BookedSession, paths: string[]): Stripe.Checkout.Session {
  const session = { ...booked.session }
  for (const path of paths) {
    if (path === 'line_items') {
      session.line_items = { object: 'list', data: booked.lineItems, has_more: false, url: `/v1/checkout/sessions/${session.id}/line_items` }
    } else if (path === 'payment_intent' || path.startsWith('payment_intent.')) {
      const intent = book.paymentIntents[String(booked.session.payment_intent)]
      const inner = path.split('.').slice(1)
      if (intent) session.payment_intent = expandIntent(book, intent, inner.length ? [inner.join('.')] : [])
    } else {
      throw cannotExpand(path)
    }
  }
  return session
}

export function expandIntent(book: BookContent, intent: Stripe.PaymentIntent, paths: string[]): Stripe.PaymentIntent {
  const expanded = { ...intent }
  for (const path of paths) {
    if (path !== 'latest_charge') throw cannotExpand(path)
    expanded.latest_charge = book.charges[String(intent.latest_charge)] ?? null
  }
  return expanded
}

function cannotExpand(path: string) {
  return invalidRequest(`This property cannot be expanded (${path}).`, { param: 'expand' })
}
