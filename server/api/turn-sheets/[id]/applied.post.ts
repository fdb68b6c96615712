import { idParams } from '#shared/schemas/common'
import { appliedBody } from '#shared/schemas/turnSheet'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: idParams,
  body: appliedBody,
  handler: ({ user, params, body }) => applyTurnSheet(useDb(), params.id, body, user),
})
