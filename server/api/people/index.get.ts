import { peopleQuery } from '#shared/schemas/people'

export default defineRoute({
  access: ['owner', 'maker', 'staff'],
  query: peopleQuery,
  handler: ({ user, query }) => listPeople(query, user),
})
