import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: 'signed-in',
  params: idParams,
  handler: ({ user, params }) => getInstrument(useDb(), params.id, user),
})
