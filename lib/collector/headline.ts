import type { CoreEstimate, Estimate } from '@/lib/method/control'
import type { JudgedAgent } from './judge'
import type { Memory } from './memory'
import type { LooseText } from './verdict'

export interface Headline {
  /** What level, trend, usual and cut are of: the core where there is one and it has settled once, else the whole. */
  estimate: Estimate
  /** The whole, where that is not the headline. */
  whole: Estimate | null
  /** Which nodes are left out of the headline; '' for none. */
  apart: string
}

/** Which of two readings speaks for the overlay. Loose ends must not hide how the rest hangs together. */
export function headlineOf(whole: Estimate, core: CoreEstimate | null, memory: Memory): Headline {
  const within = core?.estimate
  if (!core || !within || within.lambda2 === null || whole.withheld === 'unheard')
    return { estimate: whole, whole: null, apart: '' }
  const apart = core.ends.map(({ agents }) => agents.join(' ')).join(', ')
  if (within.settling && memory.apart !== apart) return { estimate: whole, whole: null, apart: '' }
  const seedings = [...whole.seedings, ...within.seedings]
  return { estimate: { ...within, coverage: whole.coverage, seedings }, whole, apart }
}

/** What is remembered of another set of nodes does not fit this one: sides, trend, rules in force. */
export function memoryFor(memory: Memory, { apart }: Headline): Memory {
  if ((memory.apart ?? '') === apart) return memory
  return { ...memory, apart, signSince: null, cut: null, recent: [], rules: [], singleCut: null }
}

/** Loose ends as they are told; with names where links are named anyway. */
export function looseTexts(
  core: CoreEstimate | null,
  agents: readonly JudgedAgent[],
  isNamed: boolean,
): LooseText[] {
  const names = new Map(agents.map(({ agentId, name }) => [agentId, name]))
  return (core?.ends ?? []).map(({ agents: ids, links }) => ({
    nodes: ids.length,
    links,
    names: isNamed ? ids.map((agentId) => names.get(agentId) ?? agentId).sort() : [],
  }))
}
