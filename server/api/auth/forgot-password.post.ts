import { forgotPasswordBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: forgotPasswordBody,
  async handler({ body }) {
    await requestPasswordReset(body.email)
    return { ok: true }
  },
})
