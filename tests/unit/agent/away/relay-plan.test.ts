import { describe, expect, test } from 'vitest'
import { distanceOf, type NearerPeer, type RelayCase, relayStep, targetsOf } from '@/agent/away/relay-plan'

const peers = (...distances: NearerPeer['distance'][]): NearerPeer[] =>
  distances.map((distance, at) => ({ peer: `peer-${at}`, distance }))

describe('the distance to the collector', () => {
  test.each<[string, boolean, NearerPeer[], number]>([
    ['is 0 while own reports are delivered, whatever neighbours say', true, peers(0, 2), 0],
    ['is 1 beside one that delivers', false, peers(2, 0), 1],
    ['is one more than the nearest neighbour’s', false, peers(1, 1), 2],
    ['is 3 beyond that', false, peers(2), 3],
    ['is 3 where all neighbours are as far', false, peers(3, 3), 3],
    ['is 3 without neighbours', false, [], 3],
  ])('%s', (_, delivers, neighbours, expected) => {
    expect(distanceOf(delivers, neighbours)).toBe(expected)
  })
})

describe('an own report is handed', () => {
  test.each<[string, NearerPeer['distance'], NearerPeer[], string[]]>([
    ['to the two nearest neighbours', 3, peers(2, 0, 1), ['peer-1', 'peer-2']],
    ['to none that is no nearer', 1, peers(1, 3), []],
    ['to one where only one is nearer', 2, peers(1, 2), ['peer-0']],
    ['to none where there is none', 3, [], []],
  ])('%s', (_, distance, neighbours, expected) => {
    expect(targetsOf(distance, neighbours, null)).toEqual(expected)
  })
})

describe('a neighbour’s report', () => {
  const relay = (over: Partial<RelayCase>): RelayCase => ({
    ownId: 'own',
    origin: 'origin',
    from: 'peer-9',
    hops: 3,
    isSeen: false,
    distance: 2,
    neighbours: peers(1),
    aside: null,
    ...over,
  })
  test.each<[string, Partial<RelayCase>, object]>([
    ['goes with the next own one where own ones are delivered', { distance: 0 }, { kind: 'deliver' }],
    ['even on its last hop', { distance: 0, hops: 1 }, { kind: 'deliver' }],
    [
      'goes on to one that delivers as well where links are not named and it comes from its own agent',
      { distance: 0, from: 'origin', aside: 'peer-3' },
      { kind: 'pass-on', to: ['peer-3'], hops: 2 },
    ],
    ['is delivered by that one', { distance: 0, hops: 2, aside: 'peer-3' }, { kind: 'deliver' }],
    ['is delivered where there is no such neighbour', { distance: 0, from: 'origin' }, { kind: 'deliver' }],
    [
      'is delivered where it has no hop left',
      { distance: 0, from: 'origin', hops: 1, aside: 'peer-3' },
      { kind: 'deliver' },
    ],
    ['goes on to nearer neighbours, one hop less', {}, { kind: 'pass-on', to: ['peer-0'], hops: 2 }],
    ['does not go back', { neighbours: [{ peer: 'peer-9', distance: 1 }] }, drop('nobody-nearer')],
    ['ends after three hops', { hops: 1 }, drop('far')],
    ['ends where nobody is nearer', { distance: 3, neighbours: peers(3) }, drop('nobody-nearer')],
    ['that is the own one come back is dropped', { origin: 'own', distance: 0 }, drop('own')],
    ['that came before is dropped', { isSeen: true, distance: 0 }, drop('seen')],
  ])('%s', (_, over, expected) => {
    expect(relayStep(relay(over))).toEqual(expected)
  })
})

function drop(reason: string): object {
  return { kind: 'drop', reason }
}
