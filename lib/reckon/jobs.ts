import type { SparseGraph } from '@/lib/method/graph'
import { type GreedyInit, type GreedyPlan, reinforceExactly } from '@/lib/method/reinforce'
import { algebraicConnectivity } from '@/lib/method/spectrum'

/** What takes too long for a thread that answers people. By name: what is asked and what comes back. */
export interface Jobs {
  connectivity: { asked: { graph: SparseGraph }; answer: { lambda2: number; lambda3: number | null } }
  reinforce: { asked: { graph: SparseGraph; init: GreedyInit }; answer: GreedyPlan }
}
export type JobName = keyof Jobs

const RUN: { [Name in JobName]: (asked: Jobs[Name]['asked']) => Jobs[Name]['answer'] } = {
  connectivity({ graph }) {
    const { lambda2, lambda3 } = algebraicConnectivity(graph)
    return { lambda2, lambda3 }
  },
  reinforce: ({ graph, init }) => reinforceExactly(graph, init),
}

export interface Asked<Name extends JobName = JobName> {
  id: number
  name: Name
  asked: Jobs[Name]['asked']
}

export type Answered = { id: number; answer: Jobs[JobName]['answer'] } | { id: number; error: string }

export function runJob<Name extends JobName>({ id, name, asked }: Asked<Name>): Answered {
  try {
    return { id, answer: RUN[name](asked) }
  } catch (error) {
    return { id, error: error instanceof Error ? error.message : String(error) }
  }
}
