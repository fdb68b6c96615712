import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in',
  params: idParams,
  handler: ({ user, params }) => getBothHeads(useDb(), params.id, user),
})
