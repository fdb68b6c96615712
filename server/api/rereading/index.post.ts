import { rereadingBody } from '#shared/schemas/rereading'

export default defineRoute({
  access: ['owner', 'maker'],
  body: rereadingBody,
  status: 201,
  handler: ({ user, body }) => startRereading(useDb(), body, user),
})
