import { changePasswordBody } from '#shared/schemas/people'

/** Other places are signed out; this one goes on with a new session. */
export default defineRoute({
  access: 'signed-in',
  body: changePasswordBody,
  async handler({ event, user, body }) {
    await changePassword(user, body.current, body.password, requestPlace(event))
    await startSession(event, user)
    return { ok: true }
  },
})
