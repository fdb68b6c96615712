import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: ['owner', 'staff'], params: idParams,
  handler: async ({ user, params }) => {
    await clearAttention(useDb(), user, params.id)
    return getOrder(useDb(), user, params.id)
  },
})
