import { idParams } from '#shared/schemas/common'
import { personPatchBody } from '#shared/schemas/people'

export default defineRoute({
  access: ['owner'],
  params: idParams,
  body: personPatchBody,
  async handler({ user, params, body }) {
    await changePerson(useDb(), params.id, body, user)
    return { ok: true }
  },
})
