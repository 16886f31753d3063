import { beforeEach, describe, expect, it } from 'vitest'
import { POST as reportRoute } from '@/app/api/agent/report/route'
import { AgentSchema, AgentSessionSchema, AgentStateSchema, ControlSchema, OverlaySchema } from '@/entities'
import type { Incoming } from '@/lib/collector/ingest-entry'
import { FACTS_KEPT_MS, ReplyFactsReader } from '@/lib/collector/reply-facts'
import { signerOf } from '@/lib/collector/signer'
import { sql } from '@/lib/db'
import {
  type ReportReply,
  type SignedReport,
  signOrders,
  signReport,
  statementOf,
  verifyOrders,
  verifyPass,
  verifyReceipt,
} from '@/lib/protocol'
import {
  call,
  deliver,
  joinAgent,
  type Member,
  problemOf,
  seedCode,
  seedOverlay,
  sendReport,
} from '@/tests/support/collector'
import { FakeClock } from '@/tests/support/fake-clock'
import { someOrders } from '@/tests/support/frames'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { healthyReport, someReport } from '@/tests/support/reports'

const seeded = overlayPerTest()

let tar: Member
let eel: Member

beforeEach(async () => {
  const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 2 })
  tar = await joinAgent(code, 'tar-01')
  eel = await joinAgent(code, 'eel-09')
})

const keyOf = async () => {
  const { publicKey, privateKey } = await seeded.em().findOneOrFail(OverlaySchema, seeded.overlay.id)
  return { publicKey, privateKey }
}
const stateOf = ({ agentId }: Member) => seeded.em().findOne(AgentStateSchema, agentId)
const v2 = (number: number, over: Partial<Incoming> = {}) => ({
  ...healthyReport(number),
  protocol: 2,
  ...over,
})

async function issueOrders(sequence = 5): Promise<void> {
  const { text, key, signature } = signOrders(
    seeded.overlay.id,
    JSON.stringify(someOrders(sequence)),
    signerOf(await keyOf()),
  )
  await seeded.em().insert(ControlSchema, {
    overlayId: seeded.overlay.id,
    ordersText: text,
    ordersKey: key,
    ordersSignature: signature,
    sequence,
    updatedAt: new Date(Date.now() - 50),
  })
}

describe('a reply', () => {
  it('of version 2 carries the orders as they were signed; of version 1 the orders alone', async () => {
    await issueOrders()
    const old = await (await sendReport(tar, someReport(1))).json()
    expect(Object.keys(old).sort()).toEqual(['orders', 'ordersAgeMs'])
    expect(old.orders).toEqual(someOrders(5))
    const { orders, signedOrders, ordersAgeMs, ...rest } = await deliver(tar, v2(2))
    expect(orders).toBeNull()
    expect(ordersAgeMs).toBeGreaterThan(0)
    const judged = verifyOrders(seeded.overlay.id, signedOrders!, [(await keyOf()).publicKey])
    expect(judged).toEqual({ ok: true, orders: someOrders(5) })
    expect(rest).toEqual({ upgrade: null })
  })

  it('has no signed orders before a leader has issued any', async () => {
    expect(await deliver(tar, v2(1))).toEqual({
      orders: null,
      ordersAgeMs: 0,
      signedOrders: null,
      upgrade: null,
    })
  })

  it('carries a receipt for what was stored, and for nothing else under the same number', async () => {
    const sent = v2(1, { wantsReceipt: true })
    const { receipt } = await deliver(tar, sent)
    const good = { statement: statementOf(tar.agentId, sent), key: receipt!.key, receipt: receipt!.receipt }
    const trusted = [(await keyOf()).publicKey]
    expect(verifyReceipt(seeded.overlay.id, good, trusted)).toBe(true)
    const [colony] = sent.sums.colonies
    const other = { ...sent, sums: { ...sent.sums, colonies: [{ ...colony!, mean: 77 }] } }
    expect(
      verifyReceipt(seeded.overlay.id, { ...good, statement: statementOf(tar.agentId, other) }, trusted),
    ).toBe(false)
    const second: ReportReply & { repeated?: true } = await (await sendReport(tar, other)).json()
    expect([second.repeated, second.receipt]).toEqual([true, undefined])
    expect((await deliver(tar, v2(2))).receipt).toBeUndefined()
  })

  it('keeps complaints where links are named, and only there', async () => {
    const complaints = [{ peer: eel.agentId, fault: 'mean' as const, ratio: 3 }]
    await deliver(tar, v2(1, { complaints }))
    expect((await stateOf(tar))?.complaints).toEqual(complaints)
    await sql(seeded.em(), `update overlays set disclosure = 'flagged' where id = ?`, [seeded.overlay.id])
    await deliver(tar, v2(2, { complaints }))
    expect((await stateOf(tar))?.complaints).toEqual([])
  })

  it('is made from what was read a tenth of a second ago at most, and the first orders are waited for', async () => {
    const clock = new FakeClock()
    const reader = new ReplyFactsReader(clock)
    const read = async () => {
      const { id } = seeded.overlay
      const facts = (await reader.read(seeded.em(), new Set([id]))).get(id)
      return { text: facts?.ordersText ?? null, readMs: facts?.readMs }
    }
    const sequenceOf = ({ text }: { text: string | null }) => text && JSON.parse(text).sequence
    expect(sequenceOf(await read())).toBeNull()
    await issueOrders(5)
    const first = await read()
    expect(sequenceOf(first)).toBe(5)
    await sql(seeded.em(), `update controls set orders_text = '{"sequence":6}' where overlay_id = ?`, [
      seeded.overlay.id,
    ])
    await clock.advance(FACTS_KEPT_MS)
    expect(await read()).toEqual(first)
    await clock.advance(1)
    const second = await read()
    expect(sequenceOf(second)).toBe(6)
    expect(second.readMs! - first.readMs!).toBe(FACTS_KEPT_MS + 1)
  })

  it('goes to one that was left out as well, but without a new pass', async () => {
    await issueOrders()
    await seeded.em().nativeUpdate(AgentSchema, { id: tar.agentId }, { state: 'left-out' })
    await sql(seeded.em(), 'update agent_sessions set pass_expires_at = clock_timestamp()')
    const reply = await deliver(tar, v2(1))
    expect(reply.signedOrders).toBeTruthy()
    expect(reply.pass).toBeUndefined()
    expect((await deliver(eel, v2(1))).pass).toBeDefined()
  })
})

describe('a relayed report', () => {
  const signed = (member: Member, report: object, at = new Date()): SignedReport =>
    signReport(
      { agentId: member.agentId, at: at.toISOString(), body: JSON.stringify(report) },
      member.keys.privateKey,
    )
  const carry = async (number: number, ...relayed: SignedReport[]) => deliver(tar, v2(number, { relayed }))

  it('is stored as the agent’s own, marked, until the agent is heard itself again', async () => {
    const { relayed } = await carry(1, signed(eel, v2(4)))
    expect(relayed).toEqual([{ agentId: eel.agentId, number: 4, stored: true, problem: null, pass: null }])
    expect(await stateOf(eel)).toMatchObject({ reportNumber: 4, relayed: true, sums: someReport(4).sums })
    expect(await stateOf(tar)).toMatchObject({ reportNumber: 1, relayed: false })
    const repeated = await carry(2, signed(eel, v2(3)))
    expect(repeated.relayed).toMatchObject([{ number: 3, stored: false, problem: null }])
    await deliver(eel, v2(5))
    expect(await stateOf(eel)).toMatchObject({ reportNumber: 5, relayed: false })
  })

  it('brings a new pass back when it is due, and again after a while, as the first may be lost', async () => {
    await sql(
      seeded.em(),
      `update agent_sessions set pass_expires_at = clock_timestamp() + interval '20 minutes'`,
    )
    const first = await carry(1, signed(eel, v2(1)))
    const pass = first.relayed?.[0]?.pass
    expect(
      await verifyPass(pass!.pass, (await keyOf()).publicKey, seeded.overlay.id, new Date()),
    ).toMatchObject({
      ok: true,
      claims: { agentId: eel.agentId, key: eel.keys.publicKey },
    })
    const { passEndsAt } = await seeded.em().findOneOrFail(AgentSchema, eel.agentId)
    expect(passEndsAt!.getTime()).toBeGreaterThanOrEqual(Date.parse(pass!.passExpiresAt))
    expect((await carry(2, signed(eel, v2(2)))).relayed?.[0]?.pass).toBeNull()
    const [session] = await seeded.em().find(AgentSessionSchema, { agent: eel.agentId })
    expect(session!.passExpiresAt!.getTime()).toBeLessThan(Date.now() + 21 * 60_000)
  })

  const someone = 'A'.repeat(86)
  const bad: [string, () => Promise<SignedReport> | SignedReport, number | null, string][] = [
    ['signed by another', () => ({ ...signed(eel, v2(1)), signature: someone }), null, 'bad-signature'],
    [
      'changed on the way',
      () => ({ ...signed(eel, v2(1)), body: JSON.stringify(v2(9)) }),
      null,
      'bad-signature',
    ],
    ['older than a minute', () => signed(eel, v2(1), new Date(Date.now() - 61_000)), null, 'too-old'],
    ['from the future', () => signed(eel, v2(1), new Date(Date.now() + 180_000)), null, 'too-old'],
    ['of an id that is none', () => ({ ...signed(eel, v2(1)), agentId: 'agent-1' }), null, 'unknown-agent'],
    [
      'of another overlay',
      async () => {
        const other = await seedOverlay(seeded.team.database, seeded.team.teamId, { slug: 'other' })
        return signed(await joinAgent(await seedCode(seeded.team.database, other.id), 'gul-04'), v2(1))
      },
      null,
      'unknown-agent',
    ],
    [
      'of an agent that was revoked',
      async () => {
        await seeded.em().nativeUpdate(AgentSchema, { id: eel.agentId }, { state: 'revoked' })
        return signed(eel, v2(1))
      },
      null,
      'agent-ended',
    ],
    ['that is no report', () => signed(eel, { number: 1 }), null, 'invalid-input'],
    [
      'that is no JSON',
      () =>
        signReport({ agentId: eel.agentId, at: new Date().toISOString(), body: '{{' }, eel.keys.privateKey),
      null,
      'malformed-json',
    ],
    [
      'with text the database cannot hold',
      () => signed(eel, healthyReport(1, { lastError: 'half \0' })),
      null,
      'invalid-input',
    ],
    [
      'whose counters have fallen',
      async () => {
        await deliver(eel, v2(5))
        return signed(eel, { ...v2(6), sums: someReport(6, (counters) => ({ ...counters, births: 1 })).sums })
      },
      6,
      'falling-counters',
    ],
  ]
  it.each(bad)(
    '%s is refused by itself: the deliverer’s and a good one beside it count',
    async (_, make, number, problem) => {
      const wrong = await make()
      const before = await stateOf(eel)
      const own = signed(tar, v2(1))
      const { relayed } = await carry(2, wrong, own)
      expect(relayed?.[0]).toEqual({ agentId: wrong.agentId, number, stored: false, problem, pass: null })
      expect(relayed?.[1]).toMatchObject({ agentId: tar.agentId, number: 1, problem: null })
      expect((await stateOf(tar))?.reportNumber).toBe(2)
      expect(await stateOf(eel)).toEqual(before)
    },
  )

  it('of a former start counts for nothing, and never as a copied key', async () => {
    await deliver(eel, v2(9))
    await deliver(eel, { ...v2(1), incarnation: 'incarnation-2' })
    for (let number = 10; number < 20; number++)
      expect((await carry(number, signed(eel, v2(number)))).relayed).toMatchObject([
        { number, stored: false, problem: null },
      ])
    expect((await deliver(eel, { ...v2(2), incarnation: 'incarnation-2' })).signedOrders).toBeNull()
  })

  it('comes with at most 31 others', async () => {
    const relayed = Array(33).fill(signed(eel, v2(1)))
    expect(
      await problemOf(await call(reportRoute, v2(1, { relayed }), { authorization: `Bearer ${tar.token}` })),
    ).toEqual([400, 'invalid-input'])
  })
})
