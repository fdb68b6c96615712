import type { Actions } from './actions'
import { noSuch } from './apiError'
import type { Book } from './book'
import { failRefund } from './refunds'
import { getSession } from './sessions'
import type { Webhooks } from './webhooks'

/**
 * What scripts and tests ask of the stand-in that the real service has no call for: POST /stand-in/…
 * Each answers once the first try to send its webhook is over, and says whether it was delivered.
 */
export async function runScripted(path: string, deps: { book: Book, actions: Actions, webhooks: Webhooks }): Promise<object | undefined> {
  const [, , kind, rawId, verb] = path.split('/')
  const id = decodeURIComponent(rawId ?? '')
  const { book, actions, webhooks } = deps
  const deliver = async (event: string) => {
    await book.save()
    return webhooks.send(event)
  }
  if (kind === 'sessions') {
    const event = sessionEvent(verb, id)
    if (!event) return undefined
    const delivered = await deliver(event)
    return { session: getSession(book.content, id).session, delivered, event }
  }
  if (kind === 'refunds' && verb === 'fail') {
    const refund = failRefund(book.content, id)
    webhooks.record('refund.failed', refund)
    const delivered = await deliver(webhooks.record('refund.updated', refund, undefined, { status: 'succeeded' }))
    return { refund, delivered }
  }
  if (kind === 'events' && verb === 'resend') {
    const booked = book.content.events[id]
    if (!booked) throw noSuch('event', id, 'id')
    booked.delivered = false
    booked.dropped = false
    booked.attempts = 0
    return { event: booked.event, delivered: await webhooks.send(id) }
  }
  return undefined

  function sessionEvent(verb: string | undefined, id: string): string | undefined {
    const booked = getSession(book.content, id)
    switch (verb) {
      case 'pay': return actions.pay(booked)
      case 'decline': return actions.decline(booked)
      case 'expire': return actions.expire(booked)
      case 'pay-later': return actions.payLater(booked)
      case 'settle': return actions.settle(booked, true)
      case 'fail': return actions.settle(booked, false)
      case 'dispute': return actions.dispute(booked)
      default: return undefined
    }
  }
}
