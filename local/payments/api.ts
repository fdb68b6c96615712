import qs from 'qs'
import type { z } from 'zod'
import { getIntent, type Actions } from './actions'
import { ApiError, fromZod, invalidRequest, noSuch } from './apiError'
import type { Book, StandInEvent } from './book'
import { expandIntent, expandSession, page } from './shapes'
import { createRefund, getRefund } from './refunds'
import { createRefundInput, createSessionInput, listInput } from './sessionInput'
import { createSession, getSession } from './sessions'
import type { Webhooks } from './webhooks'

export interface ApiRequest {
  method: string
  path: string
  query: string
  body: string
  requestId: string
  idempotencyKey: string | null
}

/** What a call answers, and the events to send once it has been answered. */
export interface ApiAnswer {
  body: object
  events?: string[]
}

interface Parameters { [name: string]: unknown }

/** The calls of the payment API that the stand-in answers, with the documented parameters, objects and errors. */
export class Api {
  constructor(private readonly deps: { book: Book, actions: Actions, webhooks: Webhooks, base: () => string, now: () => number }) {}

  handle(request: ApiRequest): ApiAnswer {
    // Deep enough for line_items[0][price_data][product_data][metadata][key].
    const parameters = qs.parse(request.method === 'GET' ? request.query : request.body, { depth: 8, arrayLimit: 200, parameterLimit: 5000 }) as Parameters
    const [, , ...parts] = request.path.split('/')
    const id = parts.length > 1 ? decodeURIComponent(parts[parts[0] === 'checkout' ? 2 : 1] ?? '') : ''
    switch (`${request.method} ${parts.map((part, index) => index === (parts[0] === 'checkout' ? 2 : 1) ? ':id' : part).join('/')}`) {
      case 'POST checkout/sessions': return this.createSession(parameters)
      case 'GET checkout/sessions': return this.listSessions(parameters)
      case 'GET checkout/sessions/:id': return { body: expandSession(this.deps.book.content, getSession(this.deps.book.content, id), expansions(parameters)) }
      case 'GET checkout/sessions/:id/line_items': return this.listLineItems(id, parameters)
      case 'POST checkout/sessions/:id/expire': return this.expireSession(id)
      case 'GET payment_intents/:id': return { body: expandIntent(this.deps.book.content, getIntent(this.deps.book, id), expansions(parameters)) }
      case 'GET charges/:id': return { body: this.deps.book.content.charges[id] ?? fail(noSuch('charge', id, 'id')) }
      case 'POST refunds': return this.createRefund(parameters, request)
      case 'GET refunds': return this.listRefunds(parameters)
      case 'GET refunds/:id': return { body: getRefund(this.deps.book.content, id) }
      case 'GET events': return this.listEvents(parameters)
      case 'GET events/:id': return { body: this.deps.book.content.events[id]?.event ?? fail(noSuch('event', id, 'id')) }
      default: throw new ApiError(404, { type: 'invalid_request_error', message: `Unrecognized request URL (${request.method}: ${request.path}). The local stand-in does not have this call.` })
    }
  }

  private createSession(parameters: Parameters): ApiAnswer {
    const input = parse(createSessionInput, parameters)
    const { content } = this.deps.book
    const booked = createSession(input, this.deps.base(), Math.floor(this.deps.now() / 1000))
    content.sessions[booked.session.id] = booked
    return { body: expandSession(content, booked, input.expand ?? []) }
  }

  private listSessions(parameters: Parameters): ApiAnswer {
    const input = parse(listInput, parameters)
    const sessions = Object.values(this.deps.book.content.sessions).map(booked => booked.session)
      .filter(session => (!input.payment_intent || session.payment_intent === input.payment_intent) && (!input.status || session.status === input.status))
    return { body: page(sessions.reverse(), input, '/v1/checkout/sessions') }
  }

  private listLineItems(id: string, parameters: Parameters): ApiAnswer {
    const { lineItems } = getSession(this.deps.book.content, id)
    return { body: page(lineItems, parse(listInput, parameters), `/v1/checkout/sessions/${id}/line_items`) }
  }

  private expireSession(id: string): ApiAnswer {
    const booked = getSession(this.deps.book.content, id)
    const event = this.deps.actions.expire(booked)
    return { body: booked.session, events: [event] }
  }

  private createRefund(parameters: Parameters, request: ApiRequest): ApiAnswer {
    const { refund, charge } = createRefund(this.deps.book.content, parse(createRefundInput, parameters), Math.floor(this.deps.now() / 1000))
    const cause: StandInEvent['request'] = { id: request.requestId, idempotency_key: request.idempotencyKey }
    const events = [['refund.created', refund], ['charge.refunded', charge], ['refund.updated', refund]] as const
    return { body: refund, events: events.map(([type, object]) => this.deps.webhooks.record(type, object, cause)) }
  }

  private listRefunds(parameters: Parameters): ApiAnswer {
    const input = parse(listInput, parameters)
    const refunds = Object.values(this.deps.book.content.refunds).filter(refund => !input.payment_intent || refund.payment_intent === input.payment_intent)
    return { body: page(refunds.reverse(), input, '/v1/refunds') }
  }

  private listEvents(parameters: Parameters): ApiAnswer {
    const input = parse(listInput, parameters)
    const wanted = input.types ?? (input.type ? [input.type] : undefined)
    const events = Object.values(this.deps.book.content.events).map(booked => booked.event).filter(event => !wanted || wanted.includes(event.type))
    return { body: page(events.reverse(), input, '/v1/events') }
  }
}

function parse<S extends z.ZodType>(schema: S, parameters: Parameters): z.output<S> {
  const result = schema.safeParse(parameters, { reportInput: true })
  if (!result.success) throw fromZod(result.error)
  return result.data
}

function expansions(parameters: Parameters): string[] {
  const { expand } = parameters
  if (expand === undefined) return []
  if (!Array.isArray(expand)) throw invalidRequest('Invalid array', { param: 'expand' })
  return expand.map(String)
}

function fail(error: ApiError): never {
  throw error
}
