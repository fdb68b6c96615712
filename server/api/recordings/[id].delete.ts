import { idParams } from '#shared/schemas/common'

export default defineRoute({
  access: ['owner', 'maker'],
  params: idParams,
  status: 204,
  handler: async ({ user, params }) => {
    await deleteRecording(useDb(), recordingFolders(getConfig().dataDir), params.id, user)
    return null
  },
})
