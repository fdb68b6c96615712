import { idParams } from '#shared/schemas/common'
import { instrumentPatchBody } from '#shared/schemas/instrument'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: idParams,
  body: instrumentPatchBody,
  handler: ({ user, params, body }) => patchInstrument(useDb(), params.id, body, user),
})
