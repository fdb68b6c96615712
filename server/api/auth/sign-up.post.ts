import { signUpBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: signUpBody,
  status: 201,
  async handler({ body }) {
    await signUp(body)
    return { ok: true }
  },
})
