import { describe, expect, test } from 'vitest'
import { MAX_SESSIONS_PER_PEER, PeerLink } from '@/agent/link/peer-link'
import { LinkSession } from '@/agent/link/session'
import { FakeClock } from '../support/fake-clock'

const clock = new FakeClock()
function session(): LinkSession {
  return new LinkSession(
    {
      clock,
      connection: { remote: 'memory', bufferedBytes: 0, attach() {}, send() {}, close() {} },
      sign: (bytes) => bytes,
      judgePass: async () => ({ ok: false, error: { code: 'pass-invalid', reason: 'never asked' } }),
    },
    { role: 'dialer', agentId: 'a', key: '', pass: '', incarnation: '', nonce: '', timeoutMs: 1, opened: 1 },
    { established() {}, message() {}, closed() {} },
  )
}

describe('of two connections of one pair', () => {
  const [first, second] = [session(), session()]
  const linkOf = (ownId: string, peer: string) => {
    const link = new PeerLink({ ownId, peer })
    link.add(first)
    link.add(second)
    return link
  }

  test('the end with the smaller id sends on the newest and closes the other once the newest has carried a frame', () => {
    const link = linkOf('gul-04', 'tar-01')
    expect(link.carrier).toBe(second)
    expect(link.heard(first)).toEqual([])
    expect(link.heard(second)).toEqual([first])
  })

  test('the end with the larger id closes nothing and sends where it last heard', () => {
    const link = linkOf('tar-01', 'gul-04')
    expect(link.carrier).toBe(first)
    expect(link.heard(second)).toEqual([])
    expect(link.carrier).toBe(second)
  })

  test.each([
    ['gul-04', 'tar-01'],
    ['tar-01', 'gul-04'],
  ])('the one that is left carries on (%s)', (own, peer) => {
    const link = linkOf(own, peer)
    link.remove(link.carrier!)
    expect(link.carrier).not.toBeNull()
    link.remove(link.carrier!)
    expect(link.carrier).toBeNull()
    expect(link.isUp).toBe(false)
  })
})

test('of too many connections the oldest that are not in use go', () => {
  const link = new PeerLink({ ownId: 'tar-01', peer: 'gul-04' })
  const sessions = Array.from({ length: MAX_SESSIONS_PER_PEER + 1 }, session)
  const excess = sessions.map((one) => link.add(one))
  expect(excess.slice(0, -1).flat()).toEqual([])
  expect(excess.at(-1)).toEqual([sessions[1]])
})
