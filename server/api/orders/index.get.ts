import { ordersQuery } from '#shared/schemas/order'

export default defineRoute({ access: 'signed-in', query: ordersQuery, handler: ({ user, query }) => listOrders(useDb(), user, query) })
