import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in',
  params: idParams,
  handler: ({ user, params }) => listBothHeads(useDb(), params.id, user),
})
