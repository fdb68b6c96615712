export default defineRoute({
  access: 'public',
  async handler({ event }) {
    await endSession(event)
    return { ok: true }
  },
})
