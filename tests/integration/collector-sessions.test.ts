import { beforeEach, describe, expect, it } from 'vitest'
import { POST as session } from '@/app/api/agent/session/route'
import { AgentSchema, AgentSessionSchema } from '@/entities'
import { setRuntime } from '@/lib/http/runtime'
import { generateKeys, sessionReplySchema } from '@/lib/protocol'
import { call, joinAgent, type Member, problemOf, seedCode, sessionBody } from '@/tests/support/collector'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { testRuntime } from '@/tests/support/people'

const seeded = overlayPerTest()

const HOUR_MS = 3_600_000
let runtime: ReturnType<typeof testRuntime>

beforeEach(async () => {
  runtime = testRuntime(seeded.team.database, () => new Date())
  setRuntime(runtime)
})

const join = async (name = 'tar-01') =>
  joinAgent(await seedCode(seeded.team.database, seeded.overlay.id), name)

describe('opening a session', () => {
  it('gives a token for an hour, of which only a hash is kept', async () => {
    const member = await join()
    const reply = sessionReplySchema.parse(
      await (await call(session, sessionBody(member.agentId, member.keys))).json(),
    )
    expect(Date.parse(reply.expiresAt) - Date.parse(reply.serverTime)).toBe(HOUR_MS)
    expect(Buffer.from(reply.token, 'base64url')).toHaveLength(32)
    const stored = await seeded.em().find(AgentSessionSchema, { agent: member.agentId })
    expect(stored).toHaveLength(2)
    expect(JSON.stringify(stored)).not.toContain(reply.token)
  })

  it('with a clock that is off says the server’s time; at most five minutes are allowed', async () => {
    const member = await join()
    const now = new Date()
    setRuntime(testRuntime(seeded.team.database, () => now))
    const at = (ms: number) => sessionBody(member.agentId, member.keys, new Date(now.getTime() + ms))
    for (const ms of [-300_001, 300_001]) {
      const response = await call(session, at(ms))
      expect(await problemOf(response)).toEqual([401, 'clock-skew'])
      expect(await response.json()).toMatchObject({ serverTime: now.toISOString() })
    }
    for (const ms of [-300_000, 300_000]) expect((await call(session, at(ms))).status).toBe(200)
  })

  const refused: [string, (member: Member) => Promise<unknown>, number, string][] = [
    ['malformed JSON', async () => 'no', 400, 'malformed-json'],
    ['an id that is none', async ({ keys }) => sessionBody('agent-1', keys), 401, 'unknown-agent'],
    ['an unknown agent', async ({ keys }) => sessionBody(crypto.randomUUID(), keys), 401, 'unknown-agent'],
    [
      'a signature by another key',
      async ({ agentId }) => sessionBody(agentId, generateKeys()),
      401,
      'bad-signature',
    ],
    [
      'a nonce that was not signed',
      async ({ agentId, keys }) => ({ ...sessionBody(agentId, keys), nonce: 'A'.repeat(22) }),
      401,
      'bad-signature',
    ],
    [
      'a proof that was used already',
      async ({ agentId, keys }) => {
        const body = sessionBody(agentId, keys)
        await call(session, body)
        return body
      },
      401,
      'proof-used',
    ],
    [
      'the key of a revoked agent',
      async ({ agentId, keys }) => {
        await seeded.em().nativeUpdate(AgentSchema, { id: agentId }, { state: 'revoked' })
        return sessionBody(agentId, keys)
      },
      403,
      'agent-ended',
    ],
  ]
  it.each(refused)('with %s is refused', async (_, body, status, code) => {
    const member = await join()
    const sent = await body(member)
    const before = await seeded.em().count(AgentSessionSchema, {})
    expect(await problemOf(await call(session, sent))).toEqual([status, code])
    expect(await seeded.em().count(AgentSessionSchema, {})).toBe(before)
    expect(runtime.failures).toEqual([])
  })
})
