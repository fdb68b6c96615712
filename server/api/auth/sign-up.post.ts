import { signUpBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: signUpBody,
  status: 201,
  async handler({ event, body }) {
    await signUp(body, requestPlace(event))
    return { ok: true }
  },
})
