import { describe, expect, it } from 'vitest'
import type { JudgedAgent } from '@/lib/collector/judge'
import type { NamedCut } from '@/lib/collector/memory'
import { type Part, partsText, partsTold } from '@/lib/collector/parts'
import type { Estimate, PartEstimate } from '@/lib/method/control'

const HARBOURS = ['Tarnwick', 'Tarnwick', 'Gullhythe', 'Gullhythe', 'Eelholm', 'Eelholm']
const agents = HARBOURS.map((harbour, index) => ({
  agentId: `agent-${index}`,
  labels: { harbour },
})) as unknown as JudgedAgent[]
const piece = (ids: number[], lambda2: number | null, settling = false): PartEstimate => ({
  agents: ids.map((id) => `agent-${id}`),
  estimate: { lambda2, low: lambda2, high: lambda2, settling } as Estimate,
})
const sides = { 'agent-0': 'a', 'agent-1': 'a', 'agent-2': 'a', 'agent-3': 'a', 'agent-4': 'b' } as const
const cut = { links: 0 } as NamedCut

describe('the pieces of an overlay', () => {
  it('have the names of the sides where those are the pieces, and of the label that tells them apart', () => {
    expect(
      partsTold([piece([0, 1, 2, 3], 2), piece([4, 5], 1, true)], agents, {
        sides: { ...sides, 'agent-5': 'b' },
        cut,
      }),
    ).toEqual([
      {
        side: 'a',
        nodes: 4,
        label: { key: 'harbour', values: ['Gullhythe', 'Tarnwick'] },
        lambda2: 2,
        low: 2,
        high: 2,
        settling: false,
      },
      {
        side: 'b',
        nodes: 2,
        label: { key: 'harbour', values: ['Eelholm'] },
        lambda2: 1,
        low: 1,
        high: 1,
        settling: true,
      },
    ])
  })

  it.each([
    ['links still cross the cut that is named', { ...cut, links: 2 }, sides],
    ['a side is not known of all', cut, sides],
    ['a piece lies on both sides', cut, { ...sides, 'agent-5': 'a' as const }],
  ])('have no names of sides where %s', (_, named, known) => {
    const [, second] = partsTold([piece([0, 1, 2, 3], 2), piece([4, 5], 1)], agents, {
      sides: known,
      cut: named,
    })
    expect(second?.side).toBeNull()
  })

  it('are one while too few are heard: those still heard, among themselves', () => {
    const told = (one: PartEstimate) => partsTold([one], agents, { sides, cut: { ...cut, links: 3 } })
    expect(told(piece([0, 1, 2, 3], 2.3456))).toMatchObject([{ side: 'a', nodes: 4, lambda2: 2.3456 }])
    expect([
      partsText(told(piece([0, 1, 2, 3], 2.3456))),
      partsText(told(piece([0, 1, 2, 3], 2.3456, true))),
      partsText(told(piece([0, 2], null))),
    ]).toEqual([
      'The 4 nodes still heard, of Gullhythe and Tarnwick, read 2.35 among themselves.',
      'The 4 nodes still heard, of Gullhythe and Tarnwick, read 2.35 among themselves, settling.',
      'The 2 nodes still heard are being read by themselves.',
    ])
  })

  it('are told one by one: read, being read, alone', () => {
    const told = partsTold([piece([0, 1], 2.3456), piece([2, 3, 4], null), piece([5], null)], agents, {
      sides: {},
      cut,
    })
    expect(told.map(({ settling }) => settling)).toEqual([false, true, false])
    expect(partsText(told)).toBe(
      'Each piece by itself: 2 nodes of Tarnwick at 2.35; 3 nodes are still being read; 1 node alone.',
    )
    expect(partsText([] satisfies Part[])).toBe('')
  })
})
