import type { ListenInit } from '../transport/transport'
import { FlagError } from './flags'

/** @throws FlagError where a pair is not key=value */
export function readLabels(pairs: readonly string[]): Record<string, string> {
  const labels: Record<string, string> = {}
  for (const pair of pairs) {
    const at = pair.indexOf('=')
    if (at < 1) throw new FlagError(`A label is written key=value, not "${pair}".`)
    labels[pair.slice(0, at).trim()] = pair.slice(at + 1).trim()
  }
  return labels
}

/** Lines key=value; empty ones and those that begin with # are passed over. */
export function labelLines(text: string): string[] {
  return text
    .split('\n')
    .map((line) => line.trim())
    .filter((line) => line !== '' && !line.startsWith('#'))
}

/** host:port, [v6]:port or :port for every address of the machine. @throws FlagError */
export function readListen(flag: string, text: string): ListenInit {
  const match = /^(?:\[([0-9a-f:.]+)\]|([^:[\]]*)):(\d{1,5})$/i.exec(text)
  const port = Number(match?.[3])
  if (!match || port > 65_535) throw new FlagError(`${flag} takes host:port, not "${text}".`)
  return { host: match[1] ?? (match[2] || '0.0.0.0'), port }
}

/** As `readListen`, and a port alone is one of this machine's loopback. @throws FlagError */
export function readMetrics(text: string): ListenInit {
  return readListen('--metrics', /^\d+$/.test(text) ? `127.0.0.1:${text}` : text)
}

/** @throws FlagError */
export function readSeconds(flag: string, text: string): number {
  const seconds = Number(text)
  if (!(seconds >= 1 && seconds <= 86_400))
    throw new FlagError(`${flag} is 1 to 86400 seconds, not "${text}".`)
  return seconds
}
