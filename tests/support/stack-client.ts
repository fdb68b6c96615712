import { spawn } from 'node:child_process'
import { fileURLToPath } from 'node:url'

/** Addresses and secrets of a running test stack. */
export interface StackInfo {
  baseUrl: string
  databaseUrl: string
  stripeApiBase: string
  stripeSecretKey: string
  stripeWebhookSecret: string
  mailInboxUrl: string
  dataDir: string
}

/** Starts a stack of its own (see stack-process.ts) and resolves when it serves. */
export async function startStack(options: { demo: boolean }): Promise<{ info: StackInfo, stop: () => Promise<void> }> {
  const file = fileURLToPath(new URL('stack-process.ts', import.meta.url))
  const child = spawn(process.execPath, ['--import', 'tsx', file, ...(options.demo ? ['--demo'] : [])], {
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
    detached: true,
  })
  const ended = new Promise<void>(resolve => child.once('exit', () => resolve()))
  const info = await new Promise<StackInfo>((resolve, reject) => {
    child.on('message', (message: { ready?: StackInfo, failed?: string }) => {
      if (message.ready) resolve(message.ready)
      if (message.failed) reject(new Error(message.failed))
    })
    void ended.then(() => reject(new Error('The test stack ended while starting.')))
  })
  const stop = async () => {
    if (child.exitCode === null) child.kill('SIGTERM')
    await ended
  }
  return { info, stop }
}
