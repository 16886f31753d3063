import {
  MAX_RELAYED,
  MAX_RELAYED_REPORT_BYTES,
  RELAYED_MOST_SECONDS,
  type SignedReport,
} from '@/lib/protocol'

/** Relayed reports of one delivery together: as text within text, beside the longest own report, they fit MAX_REPORT_BYTES. */
export const SHELF_MOST_BYTES = 8 * MAX_RELAYED_REPORT_BYTES
/** Neighbours that reports are kept of. */
const SHELF_MOST_PEERS = 64

interface Kept {
  report: SignedReport
  atMs: number
}

/**
 * Neighbours' reports until the next own one. Whether they are genuine only the collector can tell, so that one
 * neighbour's forgeries must not push another's out: the newest per (neighbour, agent), and neighbours take turns.
 */
export class RelayShelf {
  private readonly kept = new Map<string, Map<string, Kept>>()

  /** @returns false where there is no room */
  put(from: string, report: SignedReport, nowMs: number): boolean {
    const present = this.kept.get(from)
    if (!present && this.kept.size >= SHELF_MOST_PEERS) return false
    const ofPeer = present ?? new Map<string, Kept>()
    const older = ofPeer.get(report.agentId)
    if (!older && ofPeer.size >= MAX_RELAYED) return false
    if (older && older.report.at > report.at) return false
    this.kept.set(from, ofPeer)
    ofPeer.set(report.agentId, { report, atMs: nowMs })
    return true
  }

  /** Takes down what one delivery may carry; the rest waits, unless it is too old by then. */
  take(nowMs: number): SignedReport[] {
    const taken: SignedReport[] = []
    let bytes = 0
    for (let isMore = true; isMore && taken.length < MAX_RELAYED; ) {
      isMore = false
      for (const [peer, ofPeer] of this.kept) {
        const [next] = ofPeer
        if (!next) {
          this.kept.delete(peer)
          continue
        }
        const [agentId, { report, atMs }] = next
        const reportBytes = Buffer.byteLength(report.body)
        if (taken.length >= MAX_RELAYED || bytes + reportBytes > SHELF_MOST_BYTES) return taken
        ofPeer.delete(agentId)
        isMore = true
        if (nowMs - atMs > RELAYED_MOST_SECONDS * 1000) continue
        if (taken.some(({ signature }) => signature === report.signature)) continue
        taken.push(report)
        bytes += reportBytes
      }
    }
    return taken
  }

  clear(): void {
    this.kept.clear()
  }
}
