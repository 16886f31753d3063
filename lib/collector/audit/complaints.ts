import type { AuditFault, Complaint } from '@/lib/method/report'

export interface Accusing {
  agentId: string
  complaints: readonly Complaint[]
  /** Links at its best. */
  degree: number
}

export interface Upheld {
  agentId: string
  fault: AuditFault
  ratio: number
  accusers: number
}

/** So many neighbours, or this share of them, must say the same of an agent. */
export const ACCUSERS = 2
export const ACCUSERS_SHARE = 1 / 3
/** An accuser that accuses two or more, and over half its neighbours, has more likely a fault of its own. */
export const SUSPECT_FROM = 2
export const SUSPECT_SHARE = 0.5

/**
 * Two that lie together can have a third left out, and one alone a neighbour with at most three links: names are no proof. Who
 * accuses is not punished for it.
 */
export function upheld(agents: readonly Accusing[]): Upheld[] {
  const degrees = new Map(agents.map(({ agentId, degree }) => [agentId, degree]))
  const against = new Map<string, Complaint[]>()
  for (const { complaints, degree } of agents) {
    if (complaints.length >= SUSPECT_FROM && complaints.length > SUSPECT_SHARE * degree) continue
    for (const complaint of complaints)
      against.set(complaint.peer, [...(against.get(complaint.peer) ?? []), complaint])
  }
  return [...against].flatMap(([agentId, said]) => {
    const degree = degrees.get(agentId)
    if (degree === undefined) return []
    const needed = Math.min(ACCUSERS, Math.max(1, Math.ceil(ACCUSERS_SHARE * degree)))
    if (said.length < needed) return []
    const { fault, ratio } = [...said].sort((a, b) => a.ratio - b.ratio)[said.length >> 1]!
    return [{ agentId, fault, ratio, accusers: said.length }]
  })
}
