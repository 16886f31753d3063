import { randomBytes } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { CLOSE, type CloseName, encodeFrame, encodeHello, MAX_HANDSHAKE_BYTES } from '@/lib/protocol'
import { FakeClock } from '../support/fake-clock'
import { someFrame, someOrders } from '../support/frames'
import { LinkEnd, realClock } from '../support/link-end'
import { freshNonce, type Identity, NOW_SECONDS, testOverlay } from '../support/passes'
import { Stranger } from '../support/stranger'

const HANDSHAKE_TIMEOUT_MS = 300
const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')
const eel = await overlay.identity('eel-09')
const victim = new LinkEnd(overlay, gul)
const honest = new LinkEnd(overlay, tar)
/** A second one that waits for nobody. */
const impatient = new LinkEnd(overlay, await overlay.identity('gul-05'), {
  handshakeTimeoutMs: HANDSHAKE_TIMEOUT_MS,
})
let address = ''
let impatientAddress = ''

beforeAll(async () => {
  address = await victim.start()
  impatientAddress = await impatient.start()
  await honest.start()
  honest.links.addNeighbour({ address, agentId: 'gul-04' })
  await victim.until(() => victim.links.isLinked('tar-01'))
  victim.node.adopt(someOrders(7), 0, realClock.monotonicMs())
})

afterAll(async () => {
  await honest.stop()
  await victim.stop()
  await impatient.stop()
})

async function expectHonestLinkUp(): Promise<void> {
  expect(victim.events.filter(({ kind, peer }) => kind === 'link-down' && peer === 'tar-01')).toEqual([])
  await victim.until(() => victim.heardAgo('tar-01') < 30)
  await honest.until(() => honest.heardAgo('gul-04') < 30)
}

const attacks: Record<
  string,
  { close: CloseName; of?: 'the impatient one'; attack: (stranger: Stranger) => Promise<void> | void }
> = {
  'random bytes': { close: 'not-a-hello', attack: (stranger) => stranger.send(randomBytes(64)) },
  'an empty message': { close: 'not-a-hello', attack: (stranger) => stranger.send(new Uint8Array()) },
  'a frame before any handshake': {
    close: 'not-a-hello',
    attack: (stranger) => stranger.send(encodeFrame(someFrame())),
  },
  'a huge first message': {
    close: 'too-large',
    attack: (stranger) => stranger.send(new Uint8Array(MAX_HANDSHAKE_BYTES + 1).fill(1)),
  },
  'nothing at all': { close: 'handshake-timeout', of: 'the impatient one', attack: () => {} },
  'an expired pass': {
    close: 'pass-expired',
    attack: async (stranger) =>
      stranger.greet(await overlay.identity('eel-09', { expiresAt: NOW_SECONDS - 999 })),
  },
  'a pass of another overlay': {
    close: 'pass-of-another-overlay',
    attack: async (stranger) => stranger.greet(await testOverlay('overlay-elsewhere').identity('eel-09')),
  },
  'a pass that the overlay did not sign': {
    close: 'pass-invalid',
    attack: async (stranger) => stranger.greet(await testOverlay().identity('eel-09')),
  },
  'another agent’s pass': {
    close: 'pass-of-another-agent',
    attack: (stranger) => stranger.greet({ ...eel, pass: tar.pass }),
  },
  'another agent’s pass and key': {
    close: 'proof-wrong',
    attack: (stranger) => stranger.greet({ ...eel, pass: tar.pass }, { key: tar.keys.publicKey }),
  },
  'the agent’s own id': { close: 'own-id', attack: (stranger) => stranger.greet(gul) },
  'the agent’s own words': {
    close: 'own-id',
    attack: async (stranger) => stranger.send(await stranger.message(0)),
  },
  'versions nobody speaks': {
    close: 'version-mismatch',
    attack: (stranger) => stranger.greet(eel, { versions: [77] }),
  },
  'a conversation heard before': {
    close: 'replayed',
    attack: async (stranger) => {
      const spoken = await heardConversation()
      for (const bytes of spoken) stranger.send(bytes)
    },
  },
  'a fresh hello with the proof of a conversation heard before': {
    close: 'proof-wrong',
    attack: async (stranger) => {
      const [, proof = new Uint8Array()] = await heardConversation()
      stranger.send(helloOf(eel))
      stranger.send(proof)
    },
  },
  'noise after a good handshake': {
    close: 'bad-frame',
    attack: async (stranger) => {
      await stranger.greet(eel)
      await victim.until(() => victim.links.isLinked('eel-09'))
      stranger.send(randomBytes(100))
    },
  },
  'an acknowledgement of walkers that were never sent': {
    close: 'counter-exceeded',
    attack: (stranger) => asEel(stranger, [{ receivedX: 1_000_000 }]),
  },
  'a total that falls': {
    close: 'counter-fell',
    attack: (stranger) => asEel(stranger, [{ sentX: 10 }, { sentX: 9 }]),
  },
}

/** Frames of a proven but faulty agent about a colony that the victim follows. */
async function asEel(
  stranger: Stranger,
  parts: readonly { sentX?: number; receivedX?: number }[],
): Promise<void> {
  await stranger.greet(eel, { incarnation: `incarnation-${randomBytes(6).toString('hex')}` })
  await stranger.message(2)
  for (const [index, part] of parts.entries()) {
    const colony = { colony: 0, seeding: 1_000, refused: false, sentY: 0, receivedY: 0, meanOccupancy: 0 }
    const frame = someFrame({ number: index + 1, colonies: [{ ...colony, sentX: 0, receivedX: 0, ...part }] })
    stranger.send(encodeFrame(frame))
  }
}

function helloOf({ keys, pass }: Identity): Uint8Array {
  const incarnation = 'incarnation-eel-09'
  return encodeHello({ versions: [2, 1], key: keys.publicKey, pass, incarnation, nonce: freshNonce() })
}

async function heardConversation(): Promise<Uint8Array[]> {
  const spy = await Stranger.dial(address)
  const said: Uint8Array[] = []
  const { send } = spy.connection
  spy.connection.send = (bytes) => {
    said.push(bytes)
    send.call(spy.connection, bytes)
  }
  await spy.greet(eel)
  await spy.message(2)
  spy.connection.close(CLOSE['going-away'].code, '')
  await spy.closed
  return said
}

describe('an agent that is told', () => {
  test.each(Object.entries(attacks))(
    '%s, closes with its own code, and honest links stay',
    async (_, { close, of, attack }) => {
      const stranger = await Stranger.dial(of ? impatientAddress : address)
      await attack(stranger)
      const { code, reason } = await stranger.closed
      expect({ code, reason }).toEqual({
        code: CLOSE[close].code,
        reason: expect.stringContaining(CLOSE[close].sentence),
      })
      await expectHonestLinkUp()
    },
  )
})

test('silent connections beyond the limit are turned away at once; an honest agent gets in when they have timed out', async () => {
  const clock = new FakeClock()
  const init = { handshakeTimeoutMs: 1_000, maxUnproven: 3, clock }
  const door = new LinkEnd(overlay, await overlay.identity('pin-02'), init)
  const doorAddress = await door.start()
  const silent: Stranger[] = []
  for (let count = 0; count < 5; count++) silent.push(await Stranger.dial(doorAddress))
  await Promise.all(silent.slice(3).map(({ closed }) => closed))
  await clock.advance(1_000)
  const closes = await Promise.all(silent.map(({ closed }) => closed))
  const { 'handshake-timeout': timeout, 'too-many': tooMany } = CLOSE
  expect(closes.map(({ code }) => code)).toEqual([
    timeout.code,
    timeout.code,
    timeout.code,
    tooMany.code,
    tooMany.code,
  ])
  const late = new LinkEnd(overlay, await overlay.identity('pin-03'))
  await late.start()
  late.links.addNeighbour({ address: doorAddress })
  await late.until(() => late.links.isLinked('pin-02'))
  await late.stop()
  await door.stop()
})

test('a thousand messages of noise from a proven agent cost that agent its link and nobody else', async () => {
  for (let round = 0; round < 20; round++) {
    const stranger = await Stranger.dial(address)
    await stranger.greet(eel, { incarnation: `incarnation-noise-${round}` })
    await stranger.message(2)
    for (let message = 0; message < 50; message++) stranger.send(randomBytes(1 + message * 7))
    expect(await stranger.closed).toMatchObject({ code: CLOSE['bad-frame'].code })
  }
  await expectHonestLinkUp()
})

test('an agent that does not take unknown neighbours says so to an agent of its own overlay', async () => {
  const strict = new LinkEnd(overlay, await overlay.identity('pin-05'), { acceptUnknown: false })
  const strictAddress = await strict.start()
  const stranger = await Stranger.dial(strictAddress)
  await stranger.greet(eel)
  expect(await stranger.closed).toMatchObject({ code: CLOSE['not-a-neighbour'].code })
  await strict.stop()
})
