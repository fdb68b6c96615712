import { idParams } from '#shared/schemas/common'

/** The letter once more, for somebody whose link ran out. */
export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  params: idParams,
  async handler({ user, params }) {
    await inviteAgain(useDb(), params.id, user)
    return { ok: true }
  },
})
