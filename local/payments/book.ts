import { randomBytes } from 'node:crypto'
import type Stripe from 'stripe'
import { readJson, writeWhole } from '../files'

/** An event with what is known of its delivery. */
export interface BookedEvent {
  event: StandInEvent
  attempts: number
  delivered: boolean
  /** Given up after the last retry. */
  dropped: boolean
  /** Status of the last answer, or words for why there was none. */
  lastAnswer: string | null
}

/** The part of the API's event object that does not depend on its type. */
export interface StandInEvent {
  id: string
  object: 'event'
  api_version: string
  created: number
  data: { object: object, previous_attributes?: object }
  livemode: false
  pending_webhooks: number
  request: { id: string | null, idempotency_key: string | null }
  type: string
}

export interface BookedSession {
  session: Stripe.Checkout.Session
  lineItems: Stripe.LineItem[]
  intentData: { description?: string, metadata?: Record<string, string>, receipt_email?: string }
}

/** A stored answer for an idempotency key. */
export interface BookedReplay {
  fingerprint: string
  status: number
  body: string
  at: number
}

export interface BookContent {
  sessions: Record<string, BookedSession>
  paymentIntents: Record<string, Stripe.PaymentIntent>
  charges: Record<string, Stripe.Charge>
  refunds: Record<string, Stripe.Refund>
  disputes: Record<string, Stripe.Dispute>
  events: Record<string, BookedEvent>
  replays: Record<string, BookedReplay>
}

// Kept for 24 hours at least, says docs.stripe.com/api/idempotent_requests.
const REPLAY_MS = 24 * 3600 * 1000
// Bounds the file: a demo does not need more.
const MAX_EVENTS = 5000
const MAX_SESSIONS = 5000

/** All that the stand-in remembers, in one JSON file that is replaced as a whole. */
export class Book {
  readonly content: BookContent
  private saving: Promise<void> | undefined
  private waiting: Promise<void> | undefined

  constructor(private readonly file: string | undefined, private readonly now: () => number = Date.now) {
    const stored = file ? readJson(file) as Partial<BookContent> | undefined : undefined
    this.content = { sessions: {}, paymentIntents: {}, charges: {}, refunds: {}, disputes: {}, events: {}, replays: {}, ...stored }
  }

  /** Resolves when all that is in memory now is in the file. Calls made during a write share the next one. */
  save(): Promise<void> {
    if (!this.file) return Promise.resolve()
    if (this.saving) return this.waiting ??= this.saving.then(() => this.write())
    return this.write()
  }

  private write(): Promise<void> {
    this.waiting = undefined
    this.prune()
    this.saving = writeWhole(this.file!, JSON.stringify(this.content)).finally(() => {
      this.saving = undefined
    })
    return this.saving
  }

  private prune(): void {
    const { events, replays, sessions } = this.content
    for (const [key, replay] of Object.entries(replays)) if (this.now() - replay.at > REPLAY_MS) Reflect.deleteProperty(replays, key)
    const settled = Object.keys(events).filter(id => events[id]!.delivered || events[id]!.dropped)
    for (const id of settled.slice(0, Math.max(0, Object.keys(events).length - MAX_EVENTS))) Reflect.deleteProperty(events, id)
    const closed = Object.keys(sessions).filter(id => sessions[id]!.session.status !== 'open')
    for (const id of closed.slice(0, Math.max(0, Object.keys(sessions).length - MAX_SESSIONS))) Reflect.deleteProperty(sessions, id)
  }
}

const ALPHABET = 'abcdefghijkmnopqrstuvwxyzABCDEFGHIJKLMNPQRSTUVWXYZ123456789'

/** Id in the API's manner: a prefix and random letters and digits. */
export function newId(prefix: string, length = 24): string {
  return prefix + Array.from(randomBytes(length), byte => ALPHABET[byte % ALPHABET.length]).join('')
}
