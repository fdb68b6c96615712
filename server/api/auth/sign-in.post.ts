import { signInBody } from '#shared/schemas/people'

export default defineRoute({
  access: 'public',
  body: signInBody,
  async handler({ event, body }) {
    const user = await checkCredentials(body.email, body.password, getRequestIP(event) ?? 'unknown')
    await startSession(event, user)
    return { user }
  },
})
