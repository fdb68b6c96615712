import { orderBody } from '#shared/schemas/order'

export default defineRoute({ access: ['customer'], body: orderBody, status: 201, handler: ({ user, body }) => createOrder(useDb(), user, body) })
