/**
 * The start command: brings up database, stand-ins and app, says when it serves, and on SIGTERM or Ctrl-C stops all
 * that it started. When it is killed outright, its children notice and end; the database stays and is found again.
 */
import { realpath } from 'node:fs/promises'
import { join } from 'node:path'
import { ensureBuilt } from './build'
import { startChild, stopChild, waitForReady, type Child } from './children'
import { startCluster, type Cluster } from './cluster'
import { chooseClusterHome } from './databaseUser'
import { ensureFolder } from './files'
import { lockFolder, LockedError } from './lock'
import { ensurePort, tryPort } from './ports'
import { prepareDatabase } from './prepare'
import { appSettings, ensureState, needsPaymentStandIn, readChoices, saveState, writeLocalEnv, type Choices, type State } from './settings'
import { waitForHealth } from './health'

export async function supervise({ root, env = process.env }: { root: string, env?: NodeJS.ProcessEnv }): Promise<void> {
  // Whoever reads the output may go away; that is no reason to end.
  process.stdout.on('error', () => undefined)
  process.stderr.on('error', () => undefined)
  const run = new Run(root, env)
  let signals = 0
  const onSignal = () => {
    // A second signal forces; a third has nothing left to do.
    if (signals++ === 0) void run.stop(0)
    else if (signals === 2) run.force()
  }
  process.on('SIGTERM', onSignal)
  process.on('SIGINT', onSignal)
  process.on('SIGHUP', onSignal)
  try {
    await run.start()
  } catch (error) {
    if (run.stopping) return
    console.error(error instanceof Error ? error.message : error)
    await run.stop(1)
  }
}

class Run {
  stopping = false
  private readonly children: Child[] = []
  private buildPid: number | undefined
  private cluster: Promise<Cluster> | undefined

  constructor(private readonly root: string, private readonly env: NodeJS.ProcessEnv) {}

  async start(): Promise<void> {
    const choices = readChoices(this.env, this.root)
    await ensureFolder(choices.dataDir)
    choices.dataDir = await realpath(choices.dataDir)
    await lock(choices.dataDir)
    const state = await ensureState(choices.dataDir)
    await ensureFolder(join(choices.dataDir, 'logs'), 0o700)
    const port = await requirePort(choices.port)
    const publicUrl = choices.publicUrl ?? `http://127.0.0.1:${port}`
    this.cluster = choices.databaseUrl ? undefined : this.startCluster(choices, state)

    const [databaseUrl, payments, mail] = await Promise.all([
      choices.databaseUrl ?? this.cluster!.then(cluster => cluster.url),
      needsPaymentStandIn(choices) ? this.startPayments(choices, state, port) : undefined,
      choices.smtpUrl ? undefined : this.startMail(choices, state),
      this.untilStopped(ensureBuilt(this.root, pid => this.buildPid = pid)),
    ])
    if (this.cluster) state.ports.postgres = (await this.cluster).port
    await saveState(choices.dataDir, state)

    const settings = appSettings(choices, state, {
      port, databaseUrl, publicUrl, dataDir: choices.dataDir,
      stripeApiBase: payments ?? choices.stripeApiBase,
      smtpUrl: choices.smtpUrl ?? mail!.smtpUrl,
      mailInboxUrl: mail?.inboxUrl ?? choices.mailInboxUrl,
    })
    await writeLocalEnv(choices, settings)
    await this.untilStopped(prepareDatabase({ root: this.root, databaseUrl, demo: choices.demo, env: { ...this.env, ...withPrefix(settings) }, child: child => this.add(child) }))
    const app = this.startApp(settings, port, choices.dataDir)
    await waitForHealth(`http://127.0.0.1:${port}/api/health`, app)
    if (this.stopping) return
    // The demo's loader has ended by now, as it should.
    for (const child of this.children.filter(child => child.isRunning())) void child.ended.then(how => this.onLoss(child, how))
    console.log(`Rimwright is ready at http://127.0.0.1:${port}`)
  }

  /** Stops in the order of need: the app first, the database last. */
  async stop(code: number): Promise<void> {
    if (this.stopping) return
    this.stopping = true
    if (this.buildPid) process.kill(-this.buildPid, 'SIGTERM')
    for (const child of [...this.children].reverse()) await stopChild(child)
    const cluster = await this.cluster?.catch(() => undefined)
    await cluster?.stop().catch((error: Error) => console.error(`PostgreSQL did not stop: ${error.message}`))
    process.exit(code)
  }

  /** Ends the children at once; the database, which must not be killed, is told to stop and not waited for. */
  force(): void {
    for (const child of this.children) if (child.isRunning()) child.process.kill('SIGKILL')
    void this.cluster?.then(cluster => cluster.stop()).finally(() => process.exit(1))
    setTimeout(() => process.exit(1), 5_000)
  }

  private async startCluster(choices: Choices, state: State): Promise<Cluster> {
    const { home, note } = await chooseClusterHome(choices.dataDir)
    if (note) console.log(note)
    return startCluster({ home, port: state.ports.postgres, superuserPassword: state.superuserPassword, password: state.databasePassword, durable: true })
  }

  private async startPayments(choices: Choices, state: State, appPort: number): Promise<string> {
    const child = this.startProgram('payments', 'local/payments/main.ts', choices.dataDir, {
      STRIPE_SECRET_KEY: state.stripeSecretKey,
      STRIPE_WEBHOOK_SECRET: choices.stripeWebhookSecret ?? state.stripeWebhookSecret,
      WEBHOOK_URL: `http://127.0.0.1:${appPort}/api/webhooks/stripe`,
      STAND_IN_PORT: String(state.ports.payments ?? ''),
    })
    const { port } = await waitForReady<{ port: number }>(child)
    state.ports.payments = port
    return `http://127.0.0.1:${port}`
  }

  private async startMail(choices: Choices, state: State): Promise<{ smtpUrl: string, inboxUrl: string }> {
    const child = this.startProgram('mail', 'local/mail/main.ts', choices.dataDir, {
      SMTP_PORT: String(state.ports.smtp ?? ''), INBOX_PORT: String(state.ports.inbox ?? ''),
    })
    const ready = await waitForReady<{ smtpUrl: string, inboxUrl: string }>(child)
    state.ports.smtp = Number(new URL(ready.smtpUrl).port)
    state.ports.inbox = Number(new URL(ready.inboxUrl).port)
    return ready
  }

  private startApp(settings: Record<string, string>, port: number, dataDir: string): Child {
    return this.startProgram('app', '.output/server/index.mjs', dataDir, { ...withPrefix(settings), HOST: '127.0.0.1', PORT: String(port), NODE_ENV: 'production' })
  }

  private startProgram(name: string, file: string, dataDir: string, env: Record<string, string>): Child {
    return this.add(startChild({
      name, cwd: this.root, args: [join(this.root, 'local/withParent.mjs'), join(this.root, file)],
      env: { ...this.env, DATA_DIR: dataDir, ...env }, logFile: join(dataDir, 'logs', `${name}.log`),
    }))
  }

  private add(child: Child): Child {
    this.children.push(child)
    // Started while stopping: it must not outlive us.
    if (this.stopping) child.process.kill('SIGKILL')
    return child
  }

  private onLoss(child: Child, how: string): void {
    if (this.stopping) return
    console.error(`${child.name} ended (${how}). Its log: ${child.logFile}`)
    void this.stop(1)
  }

  /** A step that a signal broke off ends the start without a message of its own. */
  private async untilStopped<T>(step: Promise<T>): Promise<T> {
    const result = await step
    if (this.stopping) throw new Error('stopping')
    return result
  }
}

/** Plain names, as written in the README, and the framework's own (NUXT_SESSION_PASSWORD is read by a package of its). */
function withPrefix(settings: Record<string, string>): Record<string, string> {
  return { ...settings, ...Object.fromEntries(Object.entries(settings).map(([name, value]) => [`NUXT_${name}`, value])) }
}

async function lock(dataDir: string): Promise<void> {
  try {
    await lockFolder(dataDir, 'start')
  } catch (error) {
    if (!(error instanceof LockedError)) throw error
    throw new Error(`Rimwright already runs on ${dataDir} (process ${error.holder}). Stop that one first, or choose another folder with DATA_DIR.`)
  }
}

/** The app of a supervisor that was just killed needs a moment to notice and free its port. */
async function requirePort(wanted: number): Promise<number> {
  if (wanted === 0) return ensurePort(undefined)
  for (let tries = 0; tries < 10; tries++) {
    if (await tryPort(wanted)) return wanted
    await new Promise(resolve => setTimeout(resolve, 500))
  }
  throw new Error(`Port ${wanted} is taken by another program. Stop it, or choose another port: PORT=3001 ./docker-free-start.sh`)
}
