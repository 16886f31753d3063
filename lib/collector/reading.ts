import type { Reading } from '@/lib/data/dto'
import { CONFIDENCE, type Coverage } from '@/lib/method/control'
import type { JudgeInput } from './judge'
import type { Memory } from './memory'

/** The reading as people and programs see it. */
export function readingOf(
  { estimate, usual }: JudgeInput,
  memory: Memory,
  said: Pick<Reading, 'verdict' | 'detail' | 'data'>,
): Reading {
  const { cut, singleCut, last } = memory
  const drawn = singleCut !== false && cut !== null ? cut : null
  return {
    at: new Date(estimate.atMs).toISOString(),
    lambda2: estimate.lambda2,
    low: estimate.low,
    high: estimate.high,
    confidence: CONFIDENCE,
    core: null,
    lambda3AtMost: estimate.lambda3AtMost,
    crossCheck: estimate.crossCheck,
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
    looseEnds: [],
    coverage: coverageDto(estimate.coverage),
    seedings: estimate.seedings,
    last:
      estimate.lambda2 === null && last
        ? { at: new Date(last.atMs).toISOString(), lambda2: last.lambda2 }
        : null,
    demo: false,
  }
}

function coverageDto({ joined, heard, linksKnown, linksMeasured }: Coverage): Reading['coverage'] {
  return { joined, heard, unheard: joined - heard, linksKnown, linksMeasured }
}
