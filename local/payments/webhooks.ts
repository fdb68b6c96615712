import { createHmac } from 'node:crypto'
import { newId, type Book, type BookedEvent, type StandInEvent } from './book'

export interface WebhookOptions {
  /** Undefined: events are booked and sent to nobody. */
  url: string | undefined
  secret: string
  apiVersion: string
  /** Waits between tries. Their number bounds the tries. */
  retryDelaysMs?: number[]
  now: () => number
}

// The real service retries for days; a demo that has not heard of it within a quarter of an hour never will.
const RETRY_DELAYS_MS = [1_000, 2_000, 5_000, 10_000, 30_000, 60_000, 120_000, 300_000, 300_000]
const ANSWER_LIMIT_MS = 10_000

/**
 * Books events and sends them, signed in the service's scheme, until the endpoint answers 2xx or the tries are used up.
 * Source of the scheme: docs.stripe.com/webhooks#verify-manually.
 */
export class Webhooks {
  private readonly timers = new Set<NodeJS.Timeout>()
  private stopped = false

  constructor(private readonly book: Book, private readonly options: WebhookOptions) {}

  /** Books an event with the object as it is now. Nothing is sent yet. */
  record(type: string, object: object, request?: StandInEvent['request'], previous?: object): string {
    const id = newId('evt_')
    const event: StandInEvent = {
      id, object: 'event', api_version: this.options.apiVersion, created: Math.floor(this.options.now() / 1000),
      data: { object: structuredCloneJson(object), ...(previous ? { previous_attributes: previous } : {}) },
      livemode: false, pending_webhooks: 1, request: request ?? { id: null, idempotency_key: null }, type,
    }
    this.book.content.events[id] = { event, attempts: 0, delivered: false, dropped: false, lastAnswer: null }
    return id
  }

  /** Sends a booked event. Resolves after the first try; later tries go on by themselves. */
  async send(id: string): Promise<boolean> {
    const booked = this.book.content.events[id]
    if (!booked) return false
    const delivered = await this.attempt(booked)
    if (!delivered) this.retryLater(booked)
    return delivered
  }

  /** Goes on with what was not delivered when the stand-in last ended. */
  resume(): void {
    for (const booked of Object.values(this.book.content.events)) if (!booked.delivered && !booked.dropped) void this.send(booked.event.id)
  }

  stop(): void {
    this.stopped = true
    for (const timer of this.timers) clearTimeout(timer)
  }

  private retryLater(booked: BookedEvent): void {
    const delays = this.options.retryDelaysMs ?? RETRY_DELAYS_MS
    const delay = delays[booked.attempts - 1]
    if (this.stopped) return
    if (delay === undefined || !this.options.url) {
      booked.dropped = true
      void this.book.save()
      return
    }
    const timer = setTimeout(() => {
      this.timers.delete(timer)
      if (!booked.delivered) void this.send(booked.event.id)
    }, delay)
    this.timers.add(timer)
  }

  private async attempt(booked: BookedEvent): Promise<boolean> {
    booked.attempts++
    const payload = JSON.stringify(booked.event, null, 2)
    try {
      if (!this.options.url) throw new Error('no address to send to')
      const response = await fetch(this.options.url, {
        method: 'POST',
        headers: { 'content-type': 'application/json; charset=utf-8', 'stripe-signature': this.sign(payload) },
        body: payload,
        redirect: 'manual',
        signal: AbortSignal.timeout(ANSWER_LIMIT_MS),
      })
      await response.arrayBuffer()
      booked.lastAnswer = String(response.status)
      if (response.ok) {
        booked.delivered = true
        booked.event.pending_webhooks = 0
      }
    } catch (error) {
      booked.lastAnswer = error instanceof Error ? error.message : String(error)
    }
    await this.book.save()
    return booked.delivered
  }

  private sign(payload: string): string {
    const t = Math.floor(this.options.now() / 1000)
    const v1 = createHmac('sha256', this.options.secret).update(`${t}.${payload}`).digest('hex')
    return `t=${t},v1=${v1}`
  }
}

/** As the receiver will parse it, and cut off from later changes. */
function structuredCloneJson(object: object): object {
  return JSON.parse(JSON.stringify(object)) as object
}
