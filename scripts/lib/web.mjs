import { setTimeout as delay } from 'node:timers/promises'

/** Where to look from this machine, and what to tell a person, for a host that is listened on. */
export function addressesOf(host, port) {
  const everywhere = host === '0.0.0.0' || host === '::'
  const name = (h) => (h.includes(':') ? `[${h}]` : h)
  return {
    local: `http://${name(everywhere ? (host === '::' ? '::1' : '127.0.0.1') : host)}:${port}`,
    shown: `http://${everywhere || host === '127.0.0.1' ? 'localhost' : name(host)}:${port}`,
  }
}

/** Resolves when `url` answers 200; rejects when `ended()` says why it never will, or after `patienceMs`. */
export async function untilHealthy(url, { ended, patienceMs, signal }) {
  const deadlineMs = performance.now() + patienceMs
  let last = 'no answer'
  for (;;) {
    if (ended() !== null) throw new Error(`The web server ${ended()}.`)
    try {
      const answer = await fetch(url, { signal: AbortSignal.any([signal, AbortSignal.timeout(5_000)]) })
      if (answer.status === 200) return
      last = `status ${answer.status}`
    } catch (error) {
      signal.throwIfAborted()
      last = error.cause?.code ?? error.name
    }
    if (performance.now() > deadlineMs)
      throw new Error(`The web server is not healthy after ${patienceMs / 1000} s (${last}).`)
    await delay(100, undefined, { signal })
  }
}
