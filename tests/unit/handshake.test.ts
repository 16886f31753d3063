import { describe, expect, test } from 'vitest'
import {
  decodeHello,
  encodeHello,
  encodeProof,
  Handshake,
  type HandshakeEffect,
  type HandshakeInit,
  type LinkRole,
  linkStatement,
  MESSAGE_KIND,
  ProvenNonces,
  signBytes,
  verifyPass,
} from '@/lib/protocol'
import { freshNonce, type Identity, NOW_SECONDS, testOverlay } from '../support/passes'

const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')

class End {
  readonly outbox: Uint8Array[] = []
  outcome: Exclude<HandshakeEffect, { kind: 'send' | 'judge-pass' }> | null = null
  readonly handshake: Handshake
  readonly init: HandshakeInit
  readonly nonces: ProvenNonces

  constructor(
    role: LinkRole,
    identity: Identity,
    over: Partial<HandshakeInit> = {},
    nonces = new ProvenNonces(),
  ) {
    this.nonces = nonces
    this.init = {
      role,
      agentId: identity.agentId,
      key: identity.keys.publicKey,
      pass: identity.pass,
      incarnation: `incarnation-${identity.agentId}`,
      nonce: freshNonce(),
      ...over,
    }
    this.handshake = new Handshake(
      { sign: (bytes) => signBytes(identity.keys.privateKey, bytes), nonces },
      this.init,
    )
  }

  start(): void {
    this.act(this.handshake.start())
  }

  async receive(bytes: Uint8Array): Promise<void> {
    const effects = this.handshake.receive(bytes)
    this.act(effects)
    for (const effect of effects) {
      if (effect.kind !== 'judge-pass') continue
      const now = new Date(NOW_SECONDS * 1000)
      this.act(
        this.handshake.passJudged(await verifyPass(effect.token, overlay.keys.publicKey, overlay.id, now)),
      )
    }
  }

  private act(effects: readonly HandshakeEffect[]): void {
    for (const effect of effects) {
      if (effect.kind === 'send') this.outbox.push(effect.bytes)
      else if (effect.kind !== 'judge-pass') this.outcome = effect
    }
  }
}

async function converse(a: End, b: End): Promise<void> {
  a.start()
  b.start()
  while (a.outbox.length + b.outbox.length > 0) {
    for (const bytes of a.outbox.splice(0)) await b.receive(bytes)
    for (const bytes of b.outbox.splice(0)) await a.receive(bytes)
  }
}

const failed = (close: string) => ({ kind: 'failed', close })

test('two agents of one overlay learn each other and the start they talk to', async () => {
  const dialer = new End('dialer', tar)
  const listener = new End('listener', gul)
  await converse(dialer, listener)
  expect(dialer.outcome).toEqual({
    kind: 'established',
    peer: {
      agentId: 'gul-04',
      name: 'gul-04',
      key: gul.keys.publicKey,
      incarnation: 'incarnation-gul-04',
      version: 2,
      mask: null,
      passExpiresAt: NOW_SECONDS + 86_400,
    },
  })
  expect(listener.outcome).toMatchObject({ kind: 'established', peer: { agentId: 'tar-01' } })
})

test.each([
  ['dialer', 'listener'],
  ['listener', 'dialer'],
] as const)('with a %s of version 1, its %s speaks version 1 too', async (oldRole, newRole) => {
  const old = new End(oldRole, tar, { versions: [1] })
  const now = new End(newRole, gul)
  await converse(old, now)
  expect(old.outcome).toMatchObject({ kind: 'established', peer: { version: 1 } })
  expect(now.outcome).toMatchObject({ kind: 'established', peer: { version: 1 } })
})

test('a proof that overtakes the judging of its pass is kept until then', async () => {
  const dialer = new End('dialer', tar)
  const listener = new End('listener', gul)
  dialer.start()
  listener.start()
  await listener.receive(dialer.outbox[0]!)
  const [hello, proof] = listener.outbox
  const judged = dialer.handshake.receive(hello!)
  expect(dialer.handshake.receive(proof!)).toEqual([])
  const token = judged[0]?.kind === 'judge-pass' ? judged[0].token : ''
  const result = await verifyPass(token, overlay.keys.publicKey, overlay.id, new Date(NOW_SECONDS * 1000))
  const kinds = dialer.handshake.passJudged(result).map((effect) => effect.kind)
  expect(kinds).toEqual(['send', 'established'])
})

describe('a listener meets', () => {
  const cases: Record<string, { close: string; attack: (listener: End) => Promise<void> }> = {
    'bytes that are no hello': {
      close: 'not-a-hello',
      attack: (listener) => listener.receive(Uint8Array.from([MESSAGE_KIND.hello, 123, 0])),
    },
    'a frame before the hello': {
      close: 'not-a-hello',
      attack: (listener) => listener.receive(Uint8Array.from([MESSAGE_KIND.frame, 1, 0])),
    },
    'a hello larger than allowed': {
      close: 'too-large',
      attack: (listener) => listener.receive(new Uint8Array(9_000).fill(MESSAGE_KIND.hello)),
    },
    'versions it does not speak': {
      close: 'version-mismatch',
      attack: (listener) => converse(new End('dialer', tar, { versions: [998, 999] }), listener),
    },
    'an expired pass': {
      close: 'pass-expired',
      attack: async (listener) => {
        const old = await overlay.identity('tar-01', { expiresAt: NOW_SECONDS - 3_600 })
        await converse(new End('dialer', old), listener)
      },
    },
    'a pass of another overlay': {
      close: 'pass-of-another-overlay',
      attack: async (listener) => {
        const stranger = await testOverlay('overlay-elsewhere').identity('tar-01')
        await converse(new End('dialer', stranger), listener)
      },
    },
    'a pass that the overlay did not sign': {
      close: 'pass-invalid',
      attack: async (listener) =>
        converse(new End('dialer', await testOverlay().identity('tar-01')), listener),
    },
    'the pass of another agent, shown with the thief’s key': {
      close: 'pass-of-another-agent',
      attack: async (listener) => {
        const thief = await overlay.identity('eel-09')
        await converse(new End('dialer', { ...thief, pass: tar.pass }), listener)
      },
    },
    'the pass and key of another agent, without its private key': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const thief = await overlay.identity('eel-09')
        await converse(new End('dialer', { ...thief, pass: tar.pass }, { key: tar.keys.publicKey }), listener)
      },
    },
    'its own pass': {
      close: 'own-id',
      attack: (listener) => converse(new End('dialer', gul), listener),
    },
    'its own hello reflected': {
      close: 'own-id',
      attack: async (listener) => {
        listener.start()
        await listener.receive(listener.outbox[0]!)
      },
    },
    'a whole conversation of an honest dialer replayed': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const recorded = await recording()
        listener.start()
        for (const bytes of recorded) await listener.receive(bytes)
      },
    },
    'a conversation that it has had itself, once more': {
      close: 'replayed',
      attack: async (listener) => {
        const dialer = new End('dialer', tar)
        const first = new End('listener', gul, {}, listener.nonces)
        dialer.start()
        first.start()
        const [hello] = dialer.outbox
        await first.receive(hello!)
        await dialer.receive(first.outbox[0]!)
        await first.receive(dialer.outbox[1]!)
        expect(first.outcome).toMatchObject({ kind: 'established' })
        listener.start()
        for (const bytes of dialer.outbox) await listener.receive(bytes)
      },
    },
    'a hello whose nonce was changed on the way': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const dialer = new End('dialer', tar)
        dialer.start()
        listener.start()
        const hello = decodeHello(dialer.outbox[0]!)!
        await listener.receive(encodeHello({ ...hello, nonce: freshNonce() }))
        await dialer.receive(listener.outbox[0]!)
        await listener.receive(dialer.outbox[1]!)
      },
    },
    'proofs swapped between two exchanges that run at once': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const [one, two] = [new End('dialer', tar), new End('dialer', tar)]
        const other = new End('listener', gul, {}, listener.nonces)
        for (const end of [one, two, listener, other]) end.start()
        await listener.receive(one.outbox[0]!)
        await other.receive(two.outbox[0]!)
        await two.receive(other.outbox[0]!)
        await listener.receive(two.outbox[1]!)
      },
    },
    'an honest hello with the proof of another conversation spliced in': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const [, oldProof] = await recording()
        const dialer = new End('dialer', tar)
        dialer.start()
        listener.start()
        await listener.receive(dialer.outbox[0]!)
        await listener.receive(oldProof!)
      },
    },
    'its own proof reflected under the pass of the other end': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const dialer = new End('dialer', tar)
        dialer.start()
        listener.start()
        await listener.receive(dialer.outbox[0]!)
        await listener.receive(listener.outbox[1]!)
      },
    },
    'a right signature in the wrong role': {
      close: 'proof-wrong',
      attack: async (listener) => {
        const dialer = new End('dialer', tar)
        dialer.start()
        listener.start()
        await listener.receive(dialer.outbox[0]!)
        const statement = linkStatement('listener', dialer.outbox[0]!, listener.outbox[0]!)
        await listener.receive(encodeProof(signBytes(tar.keys.privateKey, statement)))
      },
    },
  }

  test.each(Object.entries(cases))('%s', async (_, { close, attack }) => {
    const listener = new End('listener', gul)
    await attack(listener)
    expect(listener.outcome).toMatchObject(failed(close))
  })

  test('a listener never proves itself to an end whose pass it has not accepted', async () => {
    const listener = new End('listener', gul)
    const stranger = await testOverlay('overlay-elsewhere').identity('tar-01')
    const dialer = new End('dialer', stranger)
    dialer.start()
    listener.start()
    await listener.receive(dialer.outbox[0]!)
    expect(listener.outbox).toHaveLength(1)
  })
})

test('a dialer that knows whom it dials refuses another agent', async () => {
  const dialer = new End('dialer', tar, { expectedPeer: 'pin-02' })
  await converse(dialer, new End('listener', gul))
  expect(dialer.outcome).toMatchObject(failed('unexpected-agent'))
})

test('unknown members of a hello are skipped', async () => {
  const listener = new End('listener', gul)
  const dialer = new End('dialer', tar)
  const hello = { versions: [1, 7], key: tar.keys.publicKey, pass: tar.pass, incarnation: 'incarnation-x' }
  const more = { ...hello, nonce: freshNonce(), colour: 'grey' }
  listener.start()
  dialer.start()
  await listener.receive(encodeHello(more))
  expect(listener.outcome).toBeNull()
  expect(listener.outbox).toHaveLength(2)
})

/** Hello and proof of an honest dialer towards another listener's exchange. */
async function recording(): Promise<Uint8Array[]> {
  const dialer = new End('dialer', tar)
  const other = new End('listener', gul)
  dialer.start()
  other.start()
  const [hello] = dialer.outbox
  await other.receive(hello!)
  await dialer.receive(other.outbox[0]!)
  return [hello!, dialer.outbox[1]!]
}
