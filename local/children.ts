import { spawn, type ChildProcess } from 'node:child_process'
import { lastLines, openLog } from './files'

export interface Child {
  name: string
  logFile: string
  process: ChildProcess
  /** Resolves with words for how it ended. */
  ended: Promise<string>
  isRunning: () => boolean
}

/**
 * Starts a Node program that lives no longer than this process: it gets a channel whose closing tells it to end (see
 * withParent.mjs), and a process group of its own, so that Ctrl-C reaches the supervisor alone, which stops things in order.
 */
export function startChild(options: { name: string, args: string[], cwd: string, env: NodeJS.ProcessEnv, logFile: string }): Child {
  const log = openLog(options.logFile)
  const child = spawn(process.execPath, options.args, {
    cwd: options.cwd,
    env: options.env,
    stdio: ['ignore', log.fd, log.fd, 'ipc'],
    detached: true,
  })
  log.close()
  const ended = new Promise<string>((resolve) => {
    child.once('error', error => resolve(error.message))
    child.once('exit', (code, signal) => resolve(signal ?? `code ${code}`))
  })
  return {
    name: options.name,
    logFile: options.logFile,
    process: child,
    ended,
    isRunning: () => child.exitCode === null && child.signalCode === null && child.pid !== undefined,
  }
}

/** Waits for a child's `{ ready: … }` message. */
export function waitForReady<T>(child: Child, limitMs = 120_000): Promise<T> {
  return new Promise((resolve, reject) => {
    const timer = setTimeout(() => reject(new Error(`${child.name} did not start within ${limitMs / 1000} s. Its log: ${child.logFile}`)), limitMs)
    child.process.on('message', (message: { ready?: T }) => {
      if (message.ready === undefined) return
      clearTimeout(timer)
      resolve(message.ready)
    })
    void child.ended.then((how) => {
      clearTimeout(timer)
      reject(new Error(`${child.name} ended while starting (${how}). Its log, ${child.logFile}, ends:\n${lastLines(child.logFile)}`))
    })
  })
}

/** Asks a child to end, and after the grace period ends it with its whole group. */
export async function stopChild(child: Child, graceMs = 10_000): Promise<void> {
  if (!child.isRunning()) return
  child.process.kill('SIGTERM')
  const timer = setTimeout(() => killGroup(child.process), graceMs)
  await child.ended
  clearTimeout(timer)
}

export function killGroup(child: ChildProcess): void {
  if (child.pid === undefined) return
  try {
    process.kill(-child.pid, 'SIGKILL')
  } catch {
    // Ended already.
  }
}
