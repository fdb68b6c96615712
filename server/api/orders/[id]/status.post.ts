import { idParams } from '#shared/schemas/common'
import { orderStatusBody } from '#shared/schemas/order'

export default defineRoute({
  access: ['owner', 'maker', 'staff'], params: idParams, body: orderStatusBody,
  handler: async ({ user, params, body }) => {
    await changeOrderStatus(useDb(), user, params.id, body.to, body.note || null)
    return getOrder(useDb(), user, params.id)
  },
})
