import { describe, expect, test } from 'vitest'
import { createClock, silentLogger } from '@/agent'
import { Intake, MOST_WAITING } from '@/agent/link/intake'
import { LinkTable } from '@/agent/link/link-table'
import { LinkSession } from '@/agent/link/session'
import { WalkNode } from '@/lib/method/node'
import { createRandom } from '@/lib/method/random'
import { encodeFrame, type LinkPeer, MESSAGE_KIND } from '@/lib/protocol'
import { someFrame } from '../../../support/frames'
import { freshNonce, NOW_SECONDS, testOverlay } from '../../../support/passes'

const overlay = testOverlay()
const peer: LinkPeer = {
  agentId: 'gul-04',
  name: 'gul-04',
  key: '',
  incarnation: 'incarnation-gul-04',
  version: 2,
  mask: null,
  passExpiresAt: NOW_SECONDS,
}

function setUp() {
  let nowMs = 1_000
  const clock = createClock({ monotonicMs: () => nowMs, epochMs: () => 0 })
  const node = new WalkNode(
    { random: createRandom('intake') },
    { agentId: 'tar-01', incarnation: 'incarnation-tar-01' },
  )
  node.addLink(peer.agentId, peer.incarnation, nowMs)
  const taken: { number: number; atMs: number }[] = []
  const receive = node.receive.bind(node)
  node.receive = (from, incarnation, frame, atMs) => {
    taken.push({ number: frame.number, atMs })
    return receive(from, incarnation, frame, atMs)
  }
  const relayed: string[] = []
  const passes = {
    own: () => '',
    judge: async () => Promise.reject(new Error('none')),
    hasExpired: () => false,
  }
  const intake = new Intake(
    { clock, logger: silentLogger, node, passes, trust: overlay.trust },
    {
      tickMs: () => 200,
      table: new LinkTable({ ownId: 'tar-01' }),
      onRelay: (_, kind) => relayed.push(kind),
    },
  )
  const closes: number[] = []
  const connection = {
    remote: '192.0.2.7:4711',
    bufferedBytes: 0,
    attach: () => {},
    send: () => {},
    close: (code: number) => closes.push(code),
  }
  const session = new LinkSession(
    { clock, connection, sign: () => new Uint8Array(64), judgePass: passes.judge },
    {
      role: 'listener',
      agentId: 'tar-01',
      key: '',
      pass: '',
      incarnation: 'incarnation-tar-01',
      nonce: freshNonce(),
      timeoutMs: 5_000,
      opened: 1,
    },
    { established: () => {}, message: () => {}, closed: () => {} },
  )
  session.peer = peer
  const at = (ms: number, bytes: Uint8Array) => {
    nowMs = ms
    intake.message(session, peer, bytes)
  }
  return { intake, at, taken, relayed, closes }
}

const frame = (number: number, weight = 1) => encodeFrame(someFrame({ number, weight, heardNumber: 0 }))

describe('frames of neighbours', () => {
  test('wait for the tick, and are taken in as of when they came', () => {
    const { intake, at, taken } = setUp()
    at(1_050, frame(1))
    at(1_170, frame(2))
    expect(taken).toEqual([])
    intake.takeWaiting()
    expect(taken).toEqual([
      { number: 1, atMs: 1_050 },
      { number: 2, atMs: 1_170 },
    ])
    intake.takeWaiting()
    expect(taken).toHaveLength(2)
  })

  test('do not wait in large numbers', () => {
    const { at, taken } = setUp()
    for (let number = 1; number < MOST_WAITING; number++) at(1_000 + number, frame(number))
    expect(taken).toHaveLength(0)
    at(1_900, frame(MOST_WAITING))
    expect(taken).toHaveLength(MOST_WAITING)
  })

  test('after one that closes its connection are not looked at', () => {
    const { intake, at, taken, closes } = setUp()
    at(1_050, frame(1))
    at(1_100, Uint8Array.of(MESSAGE_KIND.frame, 99))
    at(1_150, frame(2))
    intake.takeWaiting()
    expect(taken.map(({ number }) => number)).toEqual([1])
    expect(closes).toHaveLength(1)
  })

  test('are all that waits: what is relayed goes on at once', () => {
    const { at, relayed } = setUp()
    at(1_050, Uint8Array.of(MESSAGE_KIND.relay, 1, 2, 3))
    expect(relayed).toEqual(['relay'])
  })
})
