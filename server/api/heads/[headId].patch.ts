import { headParams, headPatchBody } from '#shared/schemas/instrument'

export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: headParams,
  body: headPatchBody,
  handler: ({ user, params, body }) => changeHeadFilm(useDb(), params.headId, body, user),
})
