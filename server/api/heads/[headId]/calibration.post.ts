import { calibrationBody } from '#shared/schemas/calibration'
import { headParams } from '#shared/schemas/instrument'

export default defineRoute({
  access: ['owner', 'maker'],
  params: headParams,
  body: calibrationBody,
  status: 201,
  handler: ({ user, params, body }) => calibrateHead(useDb(), params.headId, body, user),
})
