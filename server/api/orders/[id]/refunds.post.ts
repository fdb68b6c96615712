import { idParams } from '#shared/schemas/common'
import { refundBody } from '#shared/schemas/order'

export default defineRoute({
  access: ['owner', 'staff'], params: idParams, body: refundBody, status: 201,
  handler: async ({ user, params, body }) => {
    await refundOrder(useDb(), user, params.id, body)
    return getOrder(useDb(), user, params.id)
  },
})
