import { confirmEmailBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: confirmEmailBody,
  async handler({ body }) {
    await confirmEmail(body.token)
    return { ok: true }
  },
})
