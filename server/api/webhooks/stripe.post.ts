/** Events of the payment service are a few kilobytes; a megabyte is none of theirs. */
const MAX_EVENT_BYTES = 1024 * 1024

export default defineRoute({
  access: 'public',
  handler: async ({ event }) => {
    if (Number(getRequestHeader(event, 'content-length') ?? 0) > MAX_EVENT_BYTES) throw new DomainError('too-large', 'This is too large for an event.')
    const raw = await readRawBody(event, false) ?? Buffer.alloc(0)
    return receiveStripeEvent(useDb(), verifyStripeEvent(raw, getRequestHeader(event, 'stripe-signature')))
  },
})
