import { createServer } from 'node:net'

/** Resolves to the port (0 asks for any free one), or null where it cannot be listened on. */
export function tryPort(port, host = '127.0.0.1') {
  return new Promise((resolve) => {
    const server = createServer()
    server.once('error', () => resolve(null))
    server.listen({ port, host, exclusive: true }, () => {
      const { port: got } = server.address()
      server.close(() => resolve(got))
    })
  })
}

export function parsePort(text, fallback) {
  if (text === undefined || text === '') return fallback
  const port = Number(text)
  if (!Number.isInteger(port) || port < 1 || port > 65535) {
    throw new Error(`PORT is "${text}": give a number from 1 to 65535, or leave it out for ${fallback}.`)
  }
  return port
}

export async function requirePort(port, host, command = 'npm start') {
  if ((await tryPort(port, host)) !== null) return
  throw new Error(
    `Port ${port} on ${host} cannot be listened on (in use or not allowed): stop what uses it, or choose another with PORT=${port + 1} ${command}.`,
  )
}
