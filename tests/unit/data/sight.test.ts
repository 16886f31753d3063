import { describe, expect, it } from 'vitest'
import { isPseudonym, pseudonymOf } from '@/lib/collector/pseudonym'
import { eventOf, nodesList, plain, saidList } from '@/lib/collector/said'
import { type VerdictFacts, verdictOf } from '@/lib/collector/verdict'
import { listOf } from '@/lib/collector/words'
import type { Reading } from '@/lib/data/dto'
import { sightedReading } from '@/lib/data/reading-sight'
import { sightedText } from '@/lib/data/said-sight'
import { createSight, type Face } from '@/lib/data/sight'

const faces: Face[] = [
  { agentId: 'a1', teamId: 'tarnwick', number: 1, name: 'tar-01' },
  { agentId: 'a2', teamId: 'tarnwick', number: 2, name: 'tar-02' },
  { agentId: 'a3', teamId: 'skerry', number: 3, name: 'ske-01' },
  { agentId: 'a4', teamId: 'pinnet', number: 4, name: 'pin-01' },
]
const sight = (viewers: string[], shared: Record<string, string[]> = {}, of: readonly Face[] = faces) =>
  createSight({
    secret: 's3cret',
    ownerTeamId: 'tarnwick',
    viewers,
    faces: of,
    sharedKeys: new Map(Object.entries(shared)),
  })

describe('what a team calls the nodes of others', () => {
  it('is one name each, also among a hundred thousand', () => {
    const names = new Set(Array.from({ length: 100_000 }, (_, n) => pseudonymOf('key', 'skerry', n)))
    expect(names.size).toBe(100_000)
    for (const name of [...names].slice(0, 100)) expect(name).toMatch(/^partner node [0-9a-hjkmnp-tv-z]{4}$/)
  })

  it('is one name each where short ones are used up, and is none of the short ones', () => {
    const late = Array.from({ length: 10_000 }, (_, n) => pseudonymOf('key', 'skerry', 2 ** 20 + n))
    expect(new Set(late).size).toBe(10_000)
    for (const name of late.slice(0, 100)) expect(name).toMatch(/^partner node [0-9a-hjkmnp-tv-z]{6}$/)
  })

  it('stays, and is another for another team and another overlay', () => {
    const of = (secret: string, viewer: string) => pseudonymOf(secret, viewer, 7)
    expect(of('key', 'skerry')).toBe(of('key', 'skerry'))
    expect(new Set([of('key', 'skerry'), of('key', 'pinnet'), of('other', 'skerry')]).size).toBe(3)
  })

  it('says nothing of the order in which nodes joined, nor of what a second team calls them', () => {
    const of = (viewer: string) =>
      Array.from({ length: 2_000 }, (_, n) => Number.parseInt(pseudonymOf('key', viewer, n).slice(13), 32))
    const skerry = Array.from({ length: 2_000 }, (_, n) => pseudonymOf('key', 'skerry', n))
    const ranks = (names: readonly string[]) => {
      const order = [...names].sort()
      return names.map((name) => order.indexOf(name))
    }
    const pinnet = Array.from({ length: 2_000 }, (_, n) => pseudonymOf('key', 'pinnet', n))
    // Spearman's rank correlation; its standard deviation under independence is 1/√(n − 1), here 0.022.
    const joined = Array.from({ length: 2_000 }, (_, n) => n)
    expect(of('skerry')).not.toEqual(of('pinnet'))
    expect(Math.abs(correlation(ranks(skerry), joined))).toBeLessThan(0.1)
    expect(Math.abs(correlation(ranks(skerry), ranks(pinnet)))).toBeLessThan(0.1)
  })

  it('cannot be taken by a node that enrols', () => {
    expect(['partner node 4f2k', 'Partner Node x', 'partner nodes'].map(isPseudonym)).toEqual([
      true,
      true,
      true,
    ])
    expect(['tar-01', 'the partner node', 'partnernode'].map(isPseudonym)).toEqual([false, false, false])
  })
})

function correlation(x: readonly number[], y: readonly number[]): number {
  const mean = (of: readonly number[]) => of.reduce((sum, value) => sum + value, 0) / of.length
  const [mx, my] = [mean(x), mean(y)]
  const sum = (of: (index: number) => number) => x.reduce((total, _, index) => total + of(index), 0)
  const dx = (index: number) => (x[index] ?? 0) - mx
  const dy = (index: number) => (y[index] ?? 0) - my
  return sum((i) => dx(i) * dy(i)) / Math.sqrt(sum((i) => dx(i) ** 2) * sum((i) => dy(i) ** 2))
}

describe('a team sees', () => {
  const skerry = sight(['skerry'])
  const hidden = (number: number, viewer = 'skerry') => pseudonymOf('s3cret', viewer, number)

  it('its own nodes by name and with their labels, others under names of its own and without', () => {
    const seen = faces.map(({ agentId, name }) => skerry.nameOf({ agentId, name }))
    expect(seen).toEqual([hidden(1), hidden(2), 'ske-01', hidden(4)])
    expect(faces.map(({ agentId }) => skerry.isOwn(agentId))).toEqual([false, false, true, false])
    const labels = { office: 'Tarnwick', rack: '3' }
    expect(skerry.labelsOf({ agentId: 'a1', labels })).toEqual({})
    expect(skerry.labelsOf({ agentId: 'a3', labels })).toEqual(labels)
  })

  it('all of it where no node is another team’s, and nothing is made up', () => {
    const whole = sight(['tarnwick'], {}, [])
    expect(whole.isWhole).toBe(true)
    expect(whole.nameOf({ agentId: 'never-seen', name: 'tar-09' })).toBe('tar-09')
    expect(whole.named('tar-09')).toBe('tar-09')
    expect(sight(['tarnwick', 'skerry', 'pinnet']).isWhole).toBe(true)
  })

  it('the nodes of each of its own teams, where a person belongs to several', () => {
    const both = sight(['tarnwick', 'skerry'])
    expect(faces.map(({ agentId, name }) => both.nameOf({ agentId, name }))).toEqual([
      'tar-01',
      'tar-02',
      'ske-01',
      hidden(4, 'tarnwick'),
    ])
  })

  it('labels that the other team shares, and a key wholly once every team shares it', () => {
    const shared = sight(['skerry'], { tarnwick: ['office'] })
    expect(shared.labelsOf({ agentId: 'a1', labels: { office: 'Tarnwick', rack: '3' } })).toEqual({
      office: 'Tarnwick',
    })
    expect(shared.seesKey('office')).toBe(false)
    expect(sight(['skerry'], { tarnwick: ['office'], pinnet: ['office'] }).seesKey('office')).toBe(true)
  })

  it('a node again that it names as it sees it, and none by a name that it may not know', () => {
    expect(skerry.agentNamed('ske-01')).toBe('a3')
    expect(skerry.agentNamed(hidden(1))).toBe('a1')
    expect(skerry.agentNamed('tar-01')).toBeNull()
    expect(skerry.agentNamed(hidden(1, 'pinnet'))).toBeNull()
  })

  it('a node of which nothing is known any more as some node', () => {
    expect(skerry.nameOf({ agentId: 'gone', name: 'tar-77' })).toBe('a node')
    expect(skerry.named('tar-77')).toBe('a node')
  })
})

describe('a text in parts', () => {
  const left = eventOf('agent-left', [{ node: 'ske-01' }, ' left', { of: 'ske-01', text: ': new disks' }])

  it('is plain for who may read all of it', () => {
    expect(left.text).toBe('ske-01 left: new disks')
    for (const count of [0, 1, 2, 4, 5, 9]) {
      const names = Array.from({ length: count }, (_, n) => `n${n}`)
      expect(plain(nodesList(names))).toBe(listOf(names))
      expect(
        plain(
          saidList(
            names.map((name) => [name]),
            3,
          ),
        ),
      ).toBe(listOf(names, 3))
    }
  })

  it('names nodes as each team sees them, and gives reasons to their own team', () => {
    const row = { text: left.text, data: { said: left.said }, isNaming: true }
    expect(sightedText(row, sight(['skerry']))).toBe('ske-01 left: new disks')
    expect(sightedText(row, sight(['tarnwick']))).toBe(`${pseudonymOf('s3cret', 'tarnwick', 3)} left`)
  })

  it('from before there were parts is read by the owning team only, where it may name nodes', () => {
    const row = { text: 'tar-01 left', data: null, isNaming: true }
    expect(sightedText(row, sight(['tarnwick']))).toBe('tar-01 left')
    expect(sightedText(row, sight(['skerry']))).toBeNull()
    expect(sightedText({ ...row, text: 'From firm to weak', isNaming: false }, sight(['skerry']))).toBe(
      'From firm to weak',
    )
  })
})

describe('a reading', () => {
  const facts: VerdictFacts = {
    state: 'reading',
    joined: 4,
    heard: 4,
    late: 0,
    neverHeard: 0,
    detached: 0,
    level: 'weak',
    rule: 'few-links',
    trend: 'steady',
    treatAsSplit: null,
    singleCut: true,
    cut: { nodes: { a: 2, b: 2 }, links: 1 },
    follows: { key: 'office', a: ['Tarnwick'], b: ['Skerry'] },
    shareOfUsual: null,
    leftOut: [{ name: 'tar-02', because: 'its walkers do not add up' }],
    loose: [{ nodes: 1, links: 1, names: ['ske-01'] }],
    parts: [],
  }
  const of = (given: VerdictFacts): Reading => {
    const reading: Partial<Reading> = { ...verdictOf(given), treatAsSplit: given.treatAsSplit !== null }
    return { ...blank, ...reading }
  }

  it('is said in the names and labels that the reader may see', () => {
    const hidden = pseudonymOf('s3cret', 'skerry', 2)
    const { verdict, detail } = sightedReading(of(facts), facts, sight(['skerry']))
    expect(verdict).toBe('Weak. A weak cut parts 2 nodes from 2 and hangs on 1 link.')
    expect(detail).toBe(
      `Told apart: ske-01 hangs on 1 link. What remains without that is being read. ${hidden} is left out: its walkers do not add up.`,
    )
    const shared = { tarnwick: ['office'], pinnet: ['office'] }
    expect(sightedReading(of(facts), facts, sight(['skerry'], shared)).detail).toContain(
      'It follows the label office: Tarnwick on one side, Skerry on the other.',
    )
  })

  it('does not say which label those have who fell silent together', () => {
    const label = { by: 'label' as const, nodes: 2, key: 'office', values: ['Tarnwick'] }
    const silent = { ...facts, treatAsSplit: label }
    expect(sightedReading(of(silent), silent, sight(['skerry'])).verdict).toBe(
      'Treat as split. 2 nodes are unheard, all with one label in common.',
    )
    const cut = { ...facts, treatAsSplit: { by: 'cut' as const, nodes: 2, where: ['Tarnwick'] } }
    expect(sightedReading(of(cut), cut, sight(['skerry'])).detail).not.toContain('Tarnwick')
  })

  it('from before the overlay was shared is the owning team’s as it was, and bare for others', () => {
    expect(sightedReading(of(facts), undefined, sight(['tarnwick']))).toEqual(of(facts))
    const bare = sightedReading(of(facts), undefined, sight(['skerry']))
    expect([bare.verdict, bare.detail]).toEqual([of(facts).verdict, ''])
  })
})

const blank: Reading = {
  at: '2026-12-01T10:00:00.000Z',
  lambda2: 0.1,
  low: 0.09,
  high: 0.11,
  confidence: 0.9,
  core: null,
  lambda3AtMost: null,
  crossCheck: null,
  level: 'weak',
  trend: 'steady',
  data: 'fresh',
  verdict: '',
  detail: '',
  treatAsSplit: false,
  singleCut: true,
  usual: null,
  sides: null,
  crossingLinks: 1,
  crossingWeight: 1,
  looseEnds: [],
  coverage: { linksKnown: 3, linksMeasured: 3, joined: 4, heard: 4, unheard: 0 },
  seedings: [],
  last: null,
  demo: false,
}
