import { idParams } from '#shared/schemas/common'

/** Answers the newest reading; `changed` says whether it is a new one. */
export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: idParams,
  handler: ({ user, params }) => readAgain(useDb(), recordingFolders(getConfig().dataDir), params.id, user),
})
