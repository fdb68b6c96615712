import { createHash } from 'node:crypto'
import { connect, createServer } from 'node:net'

/**
 * One start command at a time for one data folder. The lock is a name in Linux's abstract socket space: the kernel
 * frees it when its holder ends, however it ends, so no stale lock is ever left behind. The holder tells its process id
 * to whoever connects.
 */
export function lockFolder(folder: string, purpose: string): Promise<{ release: () => Promise<void> }> {
  const name = `\0rimwright-${purpose}-${createHash('sha256').update(folder).digest('hex').slice(0, 32)}`
  return new Promise((resolve, reject) => {
    const server = createServer(socket => socket.on('error', () => socket.destroy()).end(String(process.pid)))
    server.once('error', async (error: NodeJS.ErrnoException) => {
      reject(error.code === 'EADDRINUSE' ? new LockedError(await askHolder(name)) : error)
    })
    server.listen(name, () => {
      server.unref()
      resolve({ release: () => new Promise(done => server.close(() => done())) })
    })
  })
}

export class LockedError extends Error {
  constructor(readonly holder: string) {
    super(`held by process ${holder}`)
  }
}

function askHolder(name: string): Promise<string> {
  return new Promise((resolve) => {
    let text = ''
    const socket = connect(name)
    socket.setTimeout(2000, () => socket.destroy())
    socket.on('data', chunk => text += chunk.toString())
    socket.on('error', () => undefined)
    socket.on('close', () => resolve(text || 'unknown'))
  })
}
