import { idParams } from '#shared/schemas/common'

/** Whole or in part: players seek by Range. */
export default defineRoute({
  access: 'signed-in',
  params: idParams,
  handler: async ({ event, user, params }) => {
    const audio = await openAudio(useDb(), recordingFolders(getConfig().dataDir), params.id, user, getRequestHeader(event, 'range'))
    setResponseHeaders(event, audio.headers)
    setResponseStatus(event, audio.status)
    return audio.stream
  },
})
