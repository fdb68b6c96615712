import { join } from 'node:path'
import { standInPort } from '../standInPort'
import { startMailServer } from './server'

const { DATA_DIR } = process.env
if (!DATA_DIR) throw new Error('The mail stand-in needs DATA_DIR.')

const server = await startMailServer({
  stateFile: join(DATA_DIR, 'mail.json'),
  smtpPort: await standInPort('SMTP_PORT'),
  httpPort: await standInPort('INBOX_PORT'),
})

const stop = () => void server.stop().finally(() => process.exit(0))
process.once('SIGTERM', stop)
process.once('SIGINT', stop)
process.send?.({ ready: { smtpUrl: server.smtpUrl, inboxUrl: server.inboxUrl } })
