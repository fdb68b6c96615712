import { instrumentQuery } from '#shared/schemas/instrument'

export default defineRoute({
  access: 'signed-in',
  query: instrumentQuery,
  handler: ({ user, query }) => listInstruments(useDb(), query, user),
})
