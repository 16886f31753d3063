import { createHash } from 'node:crypto'
import { RELAYED_MOST_SECONDS, type SignedReport } from '@/lib/protocol'

/** Reports and agents remembered; more than this at once come from no overlay whose links carry them. */
const MOST_KEPT = 1_024

/** Which reports came by already, and which neighbours an answer to an agent goes back to. */
export class ReturnPaths {
  private readonly seen = new Set<string>()
  private readonly cameFrom = new Map<string, Map<string, number>>()

  /**
   * @param isApart what its own agent handed over does not count as the same: two that pass it to each other would both drop it
   * @returns whether this report came before
   */
  note(report: SignedReport, from: string, nowMs: number, isApart = false): boolean {
    const { agentId, at, body, signature } = report
    const hand = isApart && from === agentId ? 'first hand' : ''
    // The whole of it: a copy with a changed text must not stand for the genuine one.
    const mark = createHash('sha256')
      .update(`${hand}\n${agentId}\n${at}\n${signature}\n${body}`)
      .digest('base64url')
    const isSeen = this.seen.has(mark)
    this.seen.add(mark)
    if (this.seen.size > MOST_KEPT) this.seen.delete(first(this.seen))
    if (isSeen) return true
    const peers = this.cameFrom.get(agentId) ?? new Map<string, number>()
    peers.set(from, nowMs)
    this.cameFrom.delete(agentId)
    this.cameFrom.set(agentId, peers)
    if (this.cameFrom.size > MOST_KEPT) this.cameFrom.delete(first(this.cameFrom.keys()))
    return false
  }

  to(agentId: string, nowMs: number): string[] {
    const peers = this.cameFrom.get(agentId)
    if (!peers) return []
    for (const [peer, atMs] of peers) if (nowMs - atMs > RELAYED_MOST_SECONDS * 1000) peers.delete(peer)
    return [...peers.keys()]
  }
}

function first(values: Iterable<string>): string {
  for (const value of values) return value
  return ''
}
