import type { H3Event } from 'h3'

/**
 * Where a request comes from, for limits on guessing. Behind a proxy on this machine that is the address the proxy itself
 * added last; what a client wrote in front of it, or sends without a proxy, counts for nothing.
 */
export function requestPlace(event: H3Event): string {
  // A socket without an address is one of this machine's files.
  const peer = event.node.req.socket.remoteAddress ?? '127.0.0.1'
  const isLocal = peer === '127.0.0.1' || peer === '::1' || peer === '::ffff:127.0.0.1'
  const forwarded = isLocal ? getRequestHeader(event, 'x-forwarded-for')?.split(',').at(-1)?.trim() : undefined
  return forwarded?.slice(0, 64) || peer
}
