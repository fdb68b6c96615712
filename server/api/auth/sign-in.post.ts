import { signInBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: signInBody,
  async handler({ event, body }) {
    const user = await checkCredentials(body.email, body.password, requestPlace(event))
    await startSession(event, user)
    return { user }
  },
})
