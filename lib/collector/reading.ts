import type { Reading } from '@/lib/data/dto'
import { CONFIDENCE, type Coverage, type Estimate } from '@/lib/method/control'
import type { HeadlineInput } from './judge'
import type { Memory, NamedCut } from './memory'
import type { VerdictFacts } from './verdict'

/** As it is kept: where several teams have agents, with what the sentences are made from. */
export type KeptReading = Reading & { facts?: VerdictFacts }

/** The reading as the team that owns every node sees it. */
export function readingOf(
  { estimate, whole, usual, core }: HeadlineInput,
  memory: Memory,
  said: Pick<Reading, 'verdict' | 'detail' | 'data' | 'check' | 'parts'>,
): Reading {
  const { cut, singleCut, last } = memory
  const all = whole ?? estimate
  const drawn = singleCut !== false && cut !== null ? cut : null
  return {
    at: new Date(estimate.atMs).toISOString(),
    lambda2: all.lambda2,
    low: all.low,
    high: all.high,
    confidence: CONFIDENCE,
    core: whole ? coreOf(estimate) : null,
    lambda3AtMost: estimate.lambda3AtMost,
    crossCheck: all.crossCheck,
    settlesInMs: estimate.settlesInMs,
    answersInMs: estimate.answersInMs,
    level: memory.level,
    trend: memory.trend,
    ...said,
    treatAsSplit: memory.treatAsSplit,
    singleCut: estimate.lambda2 === null ? null : singleCut,
    usual,
    sides: drawn && [
      { name: 'a', nodes: drawn.nodes.a },
      { name: 'b', nodes: drawn.nodes.b },
    ],
    crossingLinks: drawn?.links ?? null,
    crossingWeight: drawn?.weight ?? null,
    ...(drawn?.runnerUp && { runnerUp: runnerUpOf(drawn.runnerUp) }),
    looseEnds: (core?.ends ?? []).map(({ agents, links }) => ({ nodes: agents.length, links })),
    coverage: coverageDto(estimate.coverage),
    seedings: estimate.seedings,
    last:
      estimate.lambda2 === null && last
        ? { at: new Date(last.atMs).toISOString(), lambda2: last.lambda2 }
        : null,
    demo: false,
  }
}

function runnerUpOf({ nodes, links, weight }: NonNullable<NamedCut['runnerUp']>): Reading['runnerUp'] {
  return { sides: [nodes.a, nodes.b], links, weight }
}

function coreOf({ lambda2, low, high }: Estimate): Reading['core'] {
  return lambda2 === null ? null : { lambda2, low: low ?? lambda2, high: high ?? lambda2 }
}

function coverageDto({ joined, heard, linksKnown, linksMeasured }: Coverage): Reading['coverage'] {
  return { joined, heard, unheard: joined - heard, linksKnown, linksMeasured }
}
