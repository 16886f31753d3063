/** One at a time across processes: a name the kernel takes back when its holder dies, however it dies. */
import { createHash } from 'node:crypto'
import { createServer } from 'node:net'
import { setTimeout as delay } from 'node:timers/promises'

const RETRY_MS = 30

/** `subject` is any text, usually a folder; the lock is an abstract Unix socket (unix(7)), so no file is left. */
export async function withLock(subject, work, { patienceMs = 120_000, signal } = {}) {
  const name = `\0thinspan-${createHash('sha256').update(subject).digest('hex').slice(0, 40)}`
  const deadlineMs = performance.now() + patienceMs
  let server = await take(name)
  while (server === null) {
    if (performance.now() > deadlineMs)
      throw new Error(`${subject} is held by another start: wait for it to end.`)
    await delay(RETRY_MS, undefined, { signal })
    server = await take(name)
  }
  try {
    return await work()
  } finally {
    await new Promise((resolve) => server.close(resolve))
  }
}

function take(name) {
  return new Promise((resolve, reject) => {
    const server = createServer((socket) => socket.destroy())
    server.once('error', (error) => (error.code === 'EADDRINUSE' ? resolve(null) : reject(error)))
    server.listen(name, () => resolve(server))
  })
}
