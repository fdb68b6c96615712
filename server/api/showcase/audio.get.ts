/** The sound of the public page's reading. */
export default defineRoute({
  access: 'public',
  handler: async ({ event }) => {
    const showcase = await findShowcase(useDb())
    if (!showcase) throw notFound('The recording')
    const audio = await openAudio(useDb(), recordingFolders(getConfig().dataDir), showcase.recording.id, { id: '', role: 'owner' }, getRequestHeader(event, 'range'))
    setResponseHeaders(event, audio.headers)
    setResponseStatus(event, audio.status)
    return audio.stream
  },
})
