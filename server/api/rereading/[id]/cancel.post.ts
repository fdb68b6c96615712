import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: ['owner', 'maker'],
  params: idParams,
  handler: ({ user, params }) => cancelRereading(useDb(), params.id, user),
})
