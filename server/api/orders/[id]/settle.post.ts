import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in', params: idParams,
  handler: async ({ user, params }) => {
    await settleOrder(useDb(), user, params.id)
    return getOrder(useDb(), user, params.id)
  },
})
