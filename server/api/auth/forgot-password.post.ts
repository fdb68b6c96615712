import { forgotPasswordBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: forgotPasswordBody,
  async handler({ event, body }) {
    await requestPasswordReset(body.email, requestPlace(event))
    return { ok: true }
  },
})
