import { quoteQuery } from '#shared/schemas/order'

export default defineRoute({ access: 'public', query: quoteQuery, handler: ({ query }) => quoteHead(useDb(), query) })
