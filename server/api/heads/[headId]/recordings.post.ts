import { headParams } from '#shared/schemas/instrument'

/** Reads its own stream: the body is a recording of up to 50 MB. */
export default defineRoute({
  access: ['owner', 'maker', 'customer'],
  params: headParams,
  status: 201,
  handler: async ({ event, user, params }) => {
    const answer = await receiveRecording(useDb(), recordingFolders(getConfig().dataDir), params.headId, event.node.req, user)
    const refusal = answer.recording.refusal
    if (!refusal) return answer
    setResponseStatus(event, 422, 'Unprocessable Content')
    return { statusCode: 422, statusMessage: 'Unprocessable Content', message: refusal.message, ...answer }
  },
})
