import type { Orders, ShutReason } from '@/lib/method/orders'
import type { CloseName } from '@/lib/protocol'

const CLOSE_OF: Record<ShutReason, CloseName> = {
  left: 'left-overlay',
  revoked: 'revoked',
  'left-out': 'left-out',
}

/** Agents that nobody keeps a link to, by the newest orders. */
export class ShutList {
  private closes = new Map<string, CloseName>()

  /** @returns agents that are listed now, and those that are so no more */
  follow({ shut }: Pick<Orders, 'shut'>): { shut: [string, CloseName][]; reopened: string[] } {
    const before = this.closes
    this.closes = new Map((shut ?? []).map(({ agentId, reason }) => [agentId, CLOSE_OF[reason]]))
    const reopened = [...before.keys()].filter((agentId) => !this.closes.has(agentId))
    return { shut: [...this.closes], reopened }
  }

  /** How a link with this agent is closed; null where it may have one. */
  closeOf(agentId: string): CloseName | null {
    return this.closes.get(agentId) ?? null
  }
}
