import { describe, expect, test } from 'vitest'
import { Relay } from '@/agent/away/relay'
import type { NearerPeer } from '@/agent/away/relay-plan'
import { silentLogger } from '@/agent/logger'
import { createRandom } from '@/lib/method/random'
import { FakeClock } from '../../../support/fake-clock'

/** Agents by their links; of them `silent` does not reach the collector, all others do. */
class Relays {
  readonly all = new Map<string, Relay>()
  private readonly deaf = new Set<string>()

  constructor(links: readonly [string, string][], silent: string, isNamed: boolean) {
    const names = [...new Set(links.flat())]
    for (const name of names) {
      const peers = links.flatMap(([a, b]) => (a === name ? [b] : b === name ? [a] : []))
      const delivering = () => peers.filter((peer) => peer !== silent)
      const nearer = (): NearerPeer[] =>
        name === silent ? delivering().map((peer) => ({ peer, distance: 0 })) : []
      const relay = new Relay(
        {
          clock: new FakeClock({ epochMs: 0 }),
          random: createRandom(name),
          logger: silentLogger,
          links: {
            setDistance: () => {},
            towardsCollector: nearer,
            delivering,
            send: (peer, kind, bytes) => {
              if (this.deaf.has(peer)) return false
              this.all.get(peer)!.receive(name, kind, bytes)
              return true
            },
          },
        },
        { agentId: name, isNamed: () => isNamed, onReply: () => {} },
      )
      this.all.set(name, relay)
      relay.noteOwn(name !== silent)
      if (name === silent) relay.noteOwn(false)
    }
  }

  /** Takes nothing from anybody. */
  shut(name: string): void {
    this.deaf.add(name)
  }

  /** Who delivers what `of` says, in order. */
  deliverersOf(of: string, second = 0): string[] {
    const at = new Date(Date.UTC(2031, 4, 6, 12, 0, second)).toISOString()
    const signature = Buffer.alloc(64, second).toString('base64url')
    this.all.get(of)!.send({ agentId: of, at, body: `{"second":${second}}`, signature })
    return [...this.all].flatMap(([name, relay]) => (relay.take().length > 0 ? [name] : [])).sort()
  }
}

const STAR: [string, string][] = [
  ['eel-09', 'tar-01'],
  ['eel-09', 'tar-02'],
  ['tar-01', 'gul-01'],
  ['tar-01', 'gul-02'],
  ['tar-02', 'gul-03'],
  ['tar-02', 'gul-04'],
]

describe('the report of an agent that does not reach the collector', () => {
  test('is delivered by its neighbours where links are named', () => {
    expect(new Relays(STAR, 'eel-09', true).deliverersOf('eel-09')).toEqual(['tar-01', 'tar-02'])
  })

  test('is delivered by neighbours of theirs where links are not named, always the same', () => {
    const relays = new Relays(STAR, 'eel-09', false)
    const first = relays.deliverersOf('eel-09')
    expect(first).toHaveLength(2)
    for (const name of first) expect(name).toMatch(/^gul/)
    for (let second = 1; second < 10; second++) expect(relays.deliverersOf('eel-09', second)).toEqual(first)
  })

  test('is delivered by a neighbour where nobody else takes it', () => {
    const relays = new Relays(STAR, 'eel-09', false)
    for (const name of ['gul-01', 'gul-02']) relays.shut(name)
    const found = relays.deliverersOf('eel-09')
    expect(found).toContain('tar-01')
    expect(found.some((name) => name.startsWith('gul'))).toBe(true)
  })

  test('is delivered where two neighbours have only each other', () => {
    const triangle: [string, string][] = [
      ['eel-09', 'tar-01'],
      ['eel-09', 'tar-02'],
      ['tar-01', 'tar-02'],
    ]
    expect(new Relays(triangle, 'eel-09', false).deliverersOf('eel-09')).toEqual(['tar-01', 'tar-02'])
  })
})
