import { readingsQuery } from '#shared/schemas/reading'

export default defineRoute({
  access: 'signed-in',
  query: readingsQuery,
  handler: ({ user, query }) => listHistory(useDb(), query, user),
})
