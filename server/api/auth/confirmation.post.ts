import { signInBody } from '#shared/schemas/people'

/** Asks for the confirmation link again. */
export default defineRoute({
  access: 'public',
  body: signInBody,
  async handler({ event, body }) {
    await resendConfirmation(body.email, body.password, requestPlace(event))
    return { ok: true }
  },
})
