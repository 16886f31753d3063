import { expect, test } from 'vitest'
import { LinkSession } from '@/agent/link/session'
import { type ConnectionListener, LOST_CODE } from '@/agent/transport/transport'
import { Handshake, type HandshakeEffect, type PassResult, signBytes, verifyPass } from '@/lib/protocol'
import { FakeClock } from '../support/fake-clock'
import { freshNonce, type Identity, NOW_SECONDS, testOverlay } from '../support/passes'

const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')
const judge = (token: string) =>
  verifyPass(token, overlay.keys.publicKey, overlay.id, new Date(NOW_SECONDS * 1000))

const initOf = ({ agentId, keys, pass }: Identity) => ({
  agentId,
  key: keys.publicKey,
  pass,
  incarnation: `incarnation-${agentId}`,
  nonce: freshNonce(),
})
const sends = (effects: HandshakeEffect[]) =>
  effects.flatMap((effect) => (effect.kind === 'send' ? [effect.bytes] : []))

/** A listening session that has heard hello and proof, and whose judging of the pass is under way. */
async function judging() {
  const sent: Uint8Array[] = []
  const calls: string[] = []
  let listener: ConnectionListener | null = null
  let judged: (result: PassResult) => void = () => {}
  const verdict = new Promise<PassResult>((resolve) => {
    judged = resolve
  })
  const session = new LinkSession(
    {
      clock: new FakeClock(),
      connection: {
        remote: 'memory',
        bufferedBytes: 0,
        attach: (given) => {
          listener = given
        },
        send: (bytes) => sent.push(bytes),
        close: () => {},
      },
      sign: (bytes) => signBytes(gul.keys.privateKey, bytes),
      judgePass: () => verdict,
    },
    { ...initOf(gul), role: 'listener', timeoutMs: 5_000, opened: 1 },
    {
      established: () => calls.push('established'),
      message: () => calls.push('message'),
      closed: () => calls.push('closed'),
    },
  )
  session.start()
  const sign = (bytes: Uint8Array) => signBytes(tar.keys.privateKey, bytes)
  const peer = new Handshake({ sign }, { ...initOf(tar), role: 'dialer' })
  const hello = sends(peer.start())
  peer.receive(sent[0]!)
  for (const bytes of [...hello, ...sends(peer.passJudged(await judge(gul.pass)))]) listener!.message(bytes)
  const finish = async () => {
    judged(await judge(tar.pass))
    await verdict
    await new Promise((resolve) => setImmediate(resolve))
  }
  return { session, sent, calls, listener: listener!, finish }
}

test('a connection whose pass is judged well is established', async () => {
  const { session, calls, finish } = await judging()
  await finish()
  expect(calls).toEqual(['established'])
  expect(session.isOpen).toBe(true)
})

test('a connection that is gone before its pass has been judged is never established', async () => {
  const { session, sent, calls, listener, finish } = await judging()
  listener.closed({ code: LOST_CODE, reason: '' })
  await finish()
  expect(calls).toEqual(['closed'])
  expect(session.isOpen).toBe(false)
  expect(sent).toHaveLength(1)
})
