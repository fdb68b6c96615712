import { turnSheetBody } from '#shared/schemas/turnSheet'

export default defineRoute({
  access: ['owner', 'maker'],
  body: turnSheetBody,
  status: 201,
  handler: ({ user, body }) => createTurnSheet(useDb(), body, user),
})
