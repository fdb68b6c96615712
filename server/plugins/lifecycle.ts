import { sessionHooks } from '#imports'

/**
 * Start: settings are checked before anything serves. End: the queue finishes its job, then the worker threads, and the
 * database last, because close hooks run in order and all of them need it.
 */
export default defineNitroPlugin((nitro) => {
  const config = getConfig()
  log.info({ publicUrl: config.publicUrl }, 'starting')
  // A turn later: plugins run while the built entry is still loading, and until it has, the worker's address is not known.
  setImmediate(() => startAnalysis())
  startJobs().then(resumeRereading).catch(error => log.error({ err: error }, 'job queue did not start'))

  // What the browser is told of its session comes from the row, so a revoked session disappears there too; `ended` lets the page say why.
  sessionHooks.hook('fetch', async (session, event) => {
    const user = await findUser(event)
    if (!user) {
      await clearUserSession(event)
      delete session.user
      session.ended = true
      return
    }
    session.user = user
  })

  nitro.hooks.hook('close', async () => {
    await stopJobs()
    await stopAnalysis()
    await closeDb()
  })
})
