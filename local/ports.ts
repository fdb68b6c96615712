import { createServer } from 'node:net'

/** The port if it can be listened on at 127.0.0.1 now; 0 asks the system for any. Undefined when it is taken. */
export function tryPort(port: number): Promise<number | undefined> {
  return new Promise((resolve) => {
    const server = createServer()
    server.once('error', () => resolve(undefined))
    server.listen(port, '127.0.0.1', () => {
      const address = server.address()
      server.close(() => resolve(typeof address === 'object' && address ? address.port : undefined))
    })
  })
}

/** The preferred port when it is free, else one that the system chooses. */
export async function ensurePort(preferred: number | undefined): Promise<number> {
  const port = (preferred ? await tryPort(preferred) : undefined) ?? await tryPort(0)
  if (!port) throw new Error('This machine has no free port on 127.0.0.1.')
  return port
}
