import { invitationBody } from '#shared/schemas/people'

export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  body: invitationBody,
  status: 201,
  handler: async ({ user, body }) => ({ id: await invitePerson(body, user) }),
})
