import { describe, expect, it } from 'vitest'
import type { OverlayNode } from '@/lib/data/dto'
import { hasLabel, labelChoices } from '@/lib/face/node-columns'
import { byConcern, clockText, nodeConcerns } from '@/lib/face/node-concerns'
import { linksText, nodeDetails } from '@/lib/face/node-details'

const at = '2031-03-12T11:46:00.000Z'
const health: NonNullable<OverlayNode['health']> = {
  uptimeSeconds: 90_000,
  clockSkewMs: 12,
  reportTookMs: 31.4,
  reportsFailed: 0,
  ticksLateShare: 0.01,
  lastError: null,
  linkKind: 'path',
  linksKnown: 6,
  withoutAgent: 0,
  source: { kind: 'file', error: null },
  weakestWeight: 0.82,
  meanWeight: 0.971,
  refusedNeighbours: 0,
  auditImbalance: 0,
  upgrade: null,
}
const well: OverlayNode = {
  name: 'tar-01',
  labels: { harbour: 'Tarnwick' },
  side: 'a',
  value: -0.42,
  degree: 6,
  weightedDegree: 5.5,
  heardAt: at,
  version: '0.2.0',
  state: 'heard',
  node: 'tar-01.harbourline.example:4000',
  joinedAt: at,
  endedAt: null,
  leftOutBecause: null,
  relayed: false,
  health,
}
const detail = (node: OverlayNode, label: string) =>
  nodeDetails(node)
    .flatMap((group) => group.details)
    .find((d) => d.label === label)

describe('what to look at', () => {
  it('is nothing where all is well, and nothing for a node that is gone', () => {
    expect(nodeConcerns(well)).toEqual([])
    expect(nodeConcerns({ ...well, state: 'left', health: { ...health, withoutAgent: 3 } })).toEqual([])
  })

  it('comes gravest first, each in words of its own', () => {
    const troubled: OverlayNode = {
      ...well,
      state: 'left-out',
      leftOutBecause: 'Declared 3 times what arrives.',
      relayed: true,
      health: {
        ...health,
        auditImbalance: -3,
        refusedNeighbours: 1,
        source: { kind: 'file', error: 'ENOENT' },
        upgrade: { version: '0.3.0', state: 'failed', error: 'wrong sum' },
        clockSkewMs: -45_000,
        withoutAgent: 2,
        reportTookMs: 3_210,
        ticksLateShare: 0.34,
      },
    }
    expect(nodeConcerns(troubled)).toEqual([
      'Declared 3 times what arrives.',
      'reports come through neighbours',
      'audit off by 3 walkers',
      'refuses 1 neighbour',
      'neighbour list cannot be read',
      'upgrade to 0.3.0 failed',
      'clock 45 s fast',
      '2 neighbours without an agent',
      'reports take 3.2 s',
      '34\u202f% of ticks late',
    ])
  })

  it('puts those that need looking at before those that do not, and those that are gone last', () => {
    const nodes: OverlayNode[] = [
      { ...well, name: 'a', state: 'left' },
      { ...well, name: 'b' },
      { ...well, name: 'c', relayed: true },
      { ...well, name: 'd', state: 'left-out' },
      { ...well, name: 'e', state: 'unheard' },
      { ...well, name: 'f' },
    ]
    expect(byConcern(nodes).map((n) => n.name)).toEqual(['e', 'd', 'c', 'b', 'f', 'a'])
  })

  it('tells a clock that is off by which way it is', () => {
    expect([0, 12, -12, 4_210, 61_000].map(clockText)).toEqual([
      'agrees with this server',
      '12 ms slow',
      '12 ms fast',
      '4.2 s slow',
      '61 s slow',
    ])
  })
})

describe('the sheet of a node', () => {
  it('has every figure with its name', () => {
    expect(
      nodeDetails(well).map(({ heading, details }) => [
        heading,
        details.map((d) => `${d.label}: ${d.value}`),
      ]),
    ).toEqual([
      [
        'Links',
        [
          'measured: 6 of 6',
          'delivered in time: weakest 0.82, mean 0.97',
          'what is measured: the path',
          'neighbours from: a file',
          'side of the cut: a',
          'Fiedler value: −0.42',
        ],
      ],
      [
        'Reports',
        ['come: directly', 'the last took: 31 ms', 'failed since its start: 0', 'walker audit: balances'],
      ],
      [
        'Agent',
        [
          'version: 0.2.0',
          'up for: 1 d',
          'clock: 12 ms slow',
          'ticks that come late: 1\u202f%',
          'the overlay knows it as: tar-01.harbourline.example:4000',
          'last error: none',
        ],
      ],
    ])
  })

  it('says what an agent of version 1 says, and no more', () => {
    const old: OverlayNode = { ...well, health: null, relayed: undefined, node: null }
    expect(linksText(old)).toBe('6')
    expect(nodeDetails(old).map((group) => group.heading)).toEqual(['Links', 'Agent'])
    expect(detail(old, 'delivered in time')?.value).toBe('5.50 over all links')
  })

  it('names what fails and what is done meanwhile', () => {
    const source = { kind: 'srv', error: 'The name does not exist.' }
    expect(detail({ ...well, health: { ...health, source } }, 'neighbours from')?.remark).toBe(
      'Fails: The name does not exist. The last good list is in use.',
    )
    expect(detail({ ...well, relayed: true }, 'come')?.value).toBe('through neighbours')
  })
})

describe('labels as a filter', () => {
  it('offers the pairs that not every node has', () => {
    const nodes: OverlayNode[] = [
      { ...well, labels: { harbour: 'Tarnwick', os: 'x', url: 'a=b' } },
      { ...well, labels: { harbour: 'Eelholm', os: 'x' } },
    ]
    expect(labelChoices(nodes)).toEqual(['harbour=Eelholm', 'harbour=Tarnwick', 'url=a=b'])
    expect(nodes.map((n) => [hasLabel(n, 'harbour=Tarnwick'), hasLabel(n, 'url=a=b')])).toEqual([
      [true, true],
      [false, false],
    ])
  })

  it('leaves it to the text filter where there would be too many', () => {
    const nodes = Array.from({ length: 300 }, (_, i): OverlayNode => ({ ...well, labels: { host: `h${i}` } }))
    expect(labelChoices(nodes)).toEqual([])
  })
})
