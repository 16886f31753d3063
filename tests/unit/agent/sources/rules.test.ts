import { describe, expect, test } from 'vitest'
import { afterLook, type KeptList, NOTHING_KEPT } from '@/agent/sources/kept-list'
import { follow, parsePath } from '@/agent/sources/path-expression'
import { planNeighbours } from '@/agent/sources/plan'
import { type ResolvedNeighbour, resolveItems } from '@/agent/sources/resolve'
import { hostPortOf, readRule } from '@/agent/sources/rule'

describe('the host and port of a node', () => {
  test.each([
    ['tar-01.harbourline.example', { host: 'tar-01.harbourline.example', port: null }],
    ['tar-01:4000', { host: 'tar-01', port: 4000 }],
    ['10.0.0.7:4000', { host: '10.0.0.7', port: 4000 }],
    ['[2001:db8::7]:4000', { host: '2001:db8::7', port: 4000 }],
    ['2001:db8::7', { host: '2001:db8::7', port: null }],
    ['http://tar-01:4000/peers', { host: 'tar-01', port: 4000 }],
    ['store+tls://user@tar-01:4000', { host: 'tar-01', port: 4000 }],
    ['tar-01:99999', null],
    ['two words', null],
  ])('of %s', (node, place) => expect(hostPortOf(node)).toEqual(place))
})

describe('a rule', () => {
  const address = (ruleText: string, node: string) => {
    const rule = readRule(ruleText)
    if (!rule.ok) throw new Error(rule.issue)
    const self = { agentId: 'self', address: null, node: null }
    const found = resolveItems([{ node, quality: null }], { rule: rule.rule, directory: null, self })
    return found.neighbours[0]?.address ?? null
  }
  test.each([
    ['7946', 'tar-01:4000', 'ws://tar-01:7946/'],
    ['ws://{host}:7946/', '2001:db8::7', 'ws://[2001:db8::7]:7946/'],
    ['wss://agent.{host}:{port}/links', 'tar-01:4000', 'wss://agent.tar-01:4000/links'],
    ['ws://{host}:{port}/', 'tar-01', null],
    ['as-given', 'ws://tar-01:7946/', 'ws://tar-01:7946/'],
    ['as-given', 'tar-01:4000', null],
  ])('%s for %s', (rule, node, expected) => expect(address(rule, node)).toBe(expected))
  test.each(['http://{host}:1/', 'ws://fixed:1/', 'ws://{host', 'sideways'])('%s is none', (text) =>
    expect(readRule(text)).toMatchObject({ ok: false }),
  )
})

describe('the directory', () => {
  const directory = {
    items: [
      { agentId: 'a-tar', name: 'tar-01', address: 'ws://10.0.0.1:7946/', node: 'tar-01.example:4000' },
      { agentId: 'a-gul', name: 'gul-04', address: null, node: null },
      { agentId: 'a-pin', name: 'pin-02', address: 'ws://10.0.0.3:7946/', node: 'shared.example:4000' },
      { agentId: 'a-eel', name: 'eel-09', address: 'ws://10.0.0.4:7946/', node: 'shared.example:4001' },
    ],
  }
  const resolve = (
    nodes: string[],
    self = { agentId: 'self', address: null as string | null, node: null as string | null },
  ) =>
    resolveItems(
      nodes.map((node) => ({ node, quality: null })),
      { rule: { kind: 'directory' }, directory, self },
    )
  test.each([
    ['by the node’s address', 'tar-01.example:4000', 'a-tar'],
    ['by name', 'gul-04', 'a-gul'],
    ['by a name with a port', 'gul-04:4000', 'a-gul'],
    ['by a host that one agent has', 'tar-01.example', 'a-tar'],
    ['by one of two ports of a host', 'shared.example:4001', 'a-eel'],
  ])('finds an agent %s', (_, node, agentId) => {
    expect(resolve([node])).toMatchObject({ neighbours: [{ agentId }], without: [] })
  })
  test('a host that several agents have is nobody’s, nor is one that none has', () => {
    expect(resolve(['shared.example', 'far.example:1'])).toEqual({
      neighbours: [],
      without: ['shared.example', 'far.example:1'],
    })
  })
  test('a node listed twice is one neighbour, and an agent is none of its own', () => {
    const self = { agentId: 'a-pin', address: null, node: 'me:1' }
    const { neighbours, without } = resolve(['tar-01', 'tar-01.example:4000', 'pin-02', 'me:1'], self)
    expect([neighbours.map(({ agentId }) => agentId), without]).toEqual([['a-tar'], []])
  })
})

describe('a path', () => {
  const json = {
    peers: [
      { address: 'a', 'x.y': 1 },
      { address: 'b', 'x.y': 2 },
    ],
    byName: { p: 'c', q: 'd' },
  }
  test.each([
    ['peers[].address', ['a', 'b']],
    ['peers[]."x.y"', [1, 2]],
    ['byName[]', ['c', 'd']],
    ['byName.p', ['c']],
    ['peers.length', null],
    ['toString', null],
    ['peers[].missing', null],
  ])('%s', (text, found) => {
    const path = parsePath(text)
    if (!path.ok) throw new Error(path.issue)
    expect(follow(json, path.steps)).toEqual(found)
  })
  test.each(['.a', 'a..b', 'a b', 'a[0]', 'a"b"'])('%s cannot be followed', (text) =>
    expect(parsePath(text)).toMatchObject({ ok: false }),
  )
})

describe('what is kept of a source', () => {
  const list = (...nodes: string[]) => ({
    ok: true as const,
    items: nodes.map((node) => ({ node, quality: null })),
  })
  const failed = { ok: false as const, reason: 'gone' }
  const after = (...looks: Parameters<typeof afterLook>[1][]): KeptList =>
    looks.reduce(afterLook, NOTHING_KEPT)
  const nodes = ({ items }: KeptList) => items?.map(({ node }) => node) ?? null
  test('a failure keeps the last good list and says why', () => {
    const kept = after(list('a', 'b'), failed)
    expect([nodes(kept), kept.error]).toEqual([['a', 'b'], 'gone'])
    expect(afterLook(kept, list('a')).error).toBeNull()
  })
  test('an empty list after one with entries is believed at the third look in a row', () => {
    expect(nodes(after(list('a'), list()))).toEqual(['a'])
    expect(after(list('a'), list()).error).toMatch(/look 1 of 3/)
    expect(nodes(after(list('a'), list(), list(), list('b'), list(), list()))).toEqual(['b'])
    expect(nodes(after(list('a'), list(), list(), list()))).toEqual([])
  })
  test('a first list may be empty', () => expect(nodes(after(list()))).toEqual([]))
})

describe('the plan', () => {
  const neighbour = (address: string, over: Partial<ResolvedNeighbour> = {}): ResolvedNeighbour => ({
    node: address,
    address,
    agentId: null,
    quality: null,
    ...over,
  })
  const held = (...all: ResolvedNeighbour[]) => new Map(all.map((n) => [n.agentId ?? n.address ?? '', n]))
  test('adds what is new, removes what is gone, leaves the rest', () => {
    expect(
      planNeighbours(held(neighbour('ws://a'), neighbour('ws://b')), [
        neighbour('ws://b'),
        neighbour('ws://c'),
      ]),
    ).toEqual({
      remove: ['ws://a'],
      add: [{ address: 'ws://c' }],
      quality: [],
    })
  })
  test('an agent that moved is told its new address under the same id', () => {
    const before = held(neighbour('ws://old', { agentId: 'a-tar' }))
    expect(planNeighbours(before, [neighbour('ws://new', { agentId: 'a-tar' })])).toEqual({
      remove: [],
      add: [{ address: 'ws://new', agentId: 'a-tar' }],
      quality: [],
    })
  })
  test('the node’s view is passed on when it changes, and is 1 again where it is withdrawn', () => {
    const before = held(neighbour('ws://a', { quality: 0.5 }), neighbour('ws://b', { quality: 0 }))
    const wanted = [
      neighbour('ws://a', { quality: 0.5 }),
      neighbour('ws://b'),
      neighbour('ws://c', { quality: 1 }),
    ]
    expect(planNeighbours(before, wanted).quality).toEqual([
      { key: 'ws://b', quality: 1 },
      { key: 'ws://c', quality: 1 },
    ])
  })
})
