import type { AgentHealth, LinkKind, UpgradeState } from '@/lib/method/report'
import type { UpgradeOffer } from '@/lib/protocol'

/** A report holds no longer texts than this. */
const MOST_CHARS = 300

export interface SourceNote {
  kind: string
  error: string | null
  /** Neighbours the overlay knows, but whose agent is not known. */
  withoutAgent: number
  /** Those among them that are not even dialed, as no address follows. */
  unresolved?: number
}

export interface HealthInit {
  /** Said by the embedding program; else it follows from what is used. */
  linkKind?: LinkKind
}

/** What an agent is told of itself by the program around it, for reports and status. */
export class Health {
  private readonly init: HealthInit
  private hasView = false
  private source: SourceNote | null = null
  private offer: string | null = null
  upgrade: AgentHealth['upgrade'] = null

  constructor(init: HealthInit) {
    this.init = init
  }

  get linkKind(): LinkKind {
    return this.init.linkKind ?? (this.hasView ? 'path-with-view' : 'path')
  }

  get sourceFacts(): AgentHealth['source'] {
    return this.source && { kind: this.source.kind, error: clip(this.source.error) }
  }

  /** Neighbours that no link can be tried to. */
  get unresolved(): number {
    return this.source?.unresolved ?? 0
  }

  noteView(): void {
    this.hasView = true
  }

  noteSource(note: SourceNote): void {
    this.source = note
  }

  /** @returns whether it is another offer than the last */
  noteOffer(offer: UpgradeOffer | null, isTaken: boolean): boolean {
    if (offer === null) {
      if (this.offer !== null) this.upgrade = null
      this.offer = null
      return false
    }
    const mark = `${offer.version} ${offer.sha256}`
    if (this.offer === mark) return false
    this.offer = mark
    this.upgrade = { version: offer.version, state: isTaken ? 'offered' : 'declined', error: null }
    return true
  }

  noteUpgrade(version: string, state: UpgradeState, error: string | null): void {
    this.upgrade = { version, state, error: clip(error) }
  }

  /** The links' part is the walk node's to fill in. */
  facts(now: {
    clockSkewMs: number
    reportTookMs: number | null
    reportsFailed: number
    ticks: number
    ticksLate: number
    lastError: string | null
    keyRing: number
  }): AgentHealth {
    return {
      ...now,
      lastError: clip(now.lastError),
      linkKind: this.linkKind,
      withoutAgent: this.source?.withoutAgent ?? 0,
      source: this.sourceFacts,
      weakestWeight: null,
      meanWeight: null,
      refused: 0,
      upgrade: this.upgrade,
    }
  }
}

const clip = (text: string | null): string | null =>
  text !== null && text.length > MOST_CHARS ? `${text.slice(0, MOST_CHARS - 1)}…` : text
