import { join } from 'node:path'
import { standInPort } from '../standInPort'
import { startPaymentServer } from './server'

const { STRIPE_SECRET_KEY, STRIPE_WEBHOOK_SECRET, WEBHOOK_URL, DATA_DIR } = process.env
if (!STRIPE_SECRET_KEY || !STRIPE_WEBHOOK_SECRET || !DATA_DIR) throw new Error('The payment stand-in needs STRIPE_SECRET_KEY, STRIPE_WEBHOOK_SECRET and DATA_DIR.')

const server = await startPaymentServer({
  secretKey: STRIPE_SECRET_KEY,
  webhookSecret: STRIPE_WEBHOOK_SECRET,
  webhookUrl: WEBHOOK_URL,
  stateFile: join(DATA_DIR, 'payments.json'),
}, await standInPort())

const stop = () => void server.stop().finally(() => process.exit(0))
process.once('SIGTERM', stop)
process.once('SIGINT', stop)
process.send?.({ ready: { port: server.port } })
