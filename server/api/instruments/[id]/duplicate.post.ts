import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: idParams,
  status: 201,
  handler: ({ user, params }) => duplicateInstrument(useDb(), params.id, user),
})
