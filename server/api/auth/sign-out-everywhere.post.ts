export default defineRoute({
  access: 'signed-in',
  async handler({ event, user }) {
    await revokeSessions(user.id)
    await endSession(event)
    return { ok: true }
  },
})
