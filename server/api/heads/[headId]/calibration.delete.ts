import { headParams } from '#shared/schemas/instrument'

export default defineRoute({
  access: ['owner', 'maker'],
  params: headParams,
  status: 204,
  handler: async ({ user, params }) => {
    await removeCalibration(useDb(), params.headId, user)
    return null
  },
})
