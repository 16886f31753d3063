import type { Server } from 'node:net'

/** Of a server that listens. */
export function portOf(server: Server): number {
  const address = server.address()
  if (typeof address !== 'object' || address === null) throw new Error('It does not listen on a port.')
  return address.port
}
