import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in',
  params: idParams,
  handler: ({ user, params }) => getTurnSheet(useDb(), params.id, user),
})
