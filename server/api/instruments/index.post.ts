import { instrumentBody } from '#shared/schemas/instrument'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  body: instrumentBody,
  status: 201,
  handler: ({ user, body }) => createInstrument(useDb(), body, user),
})
