import { MAX_UNPROVEN, MAX_UNPROVEN_PER_ADDRESS } from './link-contract'
import type { LinkSession } from './session'

export interface UnprovenInit {
  maxUnproven?: number
  maxUnprovenPerAddress?: number
}

/** Connections that have not proved themselves yet: few in all, fewer from one address. */
export class Unproven {
  private readonly sessions = new Set<LinkSession>()
  private readonly most: number
  private readonly mostPerAddress: number

  constructor({ maxUnproven, maxUnprovenPerAddress }: UnprovenInit) {
    this.most = maxUnproven ?? MAX_UNPROVEN
    this.mostPerAddress = maxUnprovenPerAddress ?? MAX_UNPROVEN_PER_ADDRESS
  }

  get all(): Iterable<LinkSession> {
    return this.sessions
  }

  /** @returns false where there are too many */
  add(session: LinkSession): boolean {
    const origin = originOf(session.remote)
    let same = 0
    for (const other of this.sessions) if (originOf(other.remote) === origin) same += 1
    if (this.sessions.size >= this.most || same >= this.mostPerAddress) return false
    this.sessions.add(session)
    return true
  }

  remove(session: LinkSession): void {
    this.sessions.delete(session)
  }
}

const MAPPED = /^::ffff:(?=\d+\.)/i

/**
 * Who stands behind `host:port`: the host, and of an IPv6 address the /64 that one machine usually has to itself
 * (RFC 6177 §2 leaves end sites no less).
 */
export function originOf(remote: string): string {
  const host = remote
    .replace(/:\d+$/, '')
    .replace(/^\[|\]$/g, '')
    .replace(MAPPED, '')
  if (!host.includes(':')) return host
  const [head = '', tail] = host.toLowerCase().split('::')
  const groups = head === '' ? [] : head.split(':')
  const missing = tail === undefined ? 0 : 8 - groups.length - (tail === '' ? 0 : tail.split(':').length)
  const whole = [
    ...groups,
    ...Array.from({ length: Math.max(0, missing) }, () => '0'),
    ...(tail?.split(':') ?? []),
  ]
  return `${whole.slice(0, 4).join(':')}::/64`
}
