import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in', params: idParams,
  handler: async ({ user, params }) => {
    await cancelOrder(useDb(), user, params.id, null)
    return getOrder(useDb(), user, params.id)
  },
})
