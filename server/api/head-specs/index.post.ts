import { headSpecBody } from '#shared/schemas/order'

export default defineRoute({ access: 'signed-in', body: headSpecBody, status: 201, handler: ({ user, body }) => createHeadSpec(useDb(), user, body) })
