import { createServer } from 'node:net'

/** Resolves to the port (0 asks for any free one), or null where it cannot be listened on. */
export function tryPort(port, host = '127.0.0.1') {
  return listenOnce(port, host).catch(() => null)
}

function listenOnce(port, host) {
  return new Promise((resolve, reject) => {
    const server = createServer()
    server.once('error', reject)
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

/** The host, not the port, is what is wrong. */
const NO_SUCH_HOST = new Set(['ENOTFOUND', 'EADDRNOTAVAIL', 'EAI_AGAIN'])

/** @param command that takes another PORT */
export async function requirePort(port, host, command = 'npm start') {
  try {
    await listenOnce(port, host)
  } catch (error) {
    throw new Error(
      NO_SUCH_HOST.has(error.code)
        ? `HOST is "${host}", which is no address of this machine (${error.code}): give one that it has, or 0.0.0.0 for all.`
        : `Port ${port} on ${host} cannot be listened on (in use or not allowed): stop what uses it, or choose another with PORT=${port < 65535 ? port + 1 : port - 1} ${command}.`,
    )
  }
}
