import { resetPasswordBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: resetPasswordBody,
  async handler({ body }) {
    await resetPassword(body.token, body.password)
    return { ok: true }
  },
})
