import { bothHeadsBody } from '#shared/schemas/bothHeads'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  body: bothHeadsBody,
  status: 201,
  handler: ({ user, body }) => readBothTogether(useDb(), body, user),
})
