import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { POST as sessionRoute } from '@/app/api/agent/session/route'
import { GET as keyRoute, POST as rotateRoute } from '@/app/api/v1/overlays/[slug]/signing-key/route'
import { AgentSchema, OverlayEventSchema, OverlaySchema } from '@/entities'
import { takeOver } from '@/lib/collector/key-turn'
import { LOOK_MS } from '@/lib/collector/leader'
import { LeaderStore, type Loaded } from '@/lib/collector/leader-store'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import { systemClock } from '@/lib/collector/process'
import { Upkeep } from '@/lib/collector/upkeep'
import { readmitAgent, revokeAgent } from '@/lib/data/agents'
import { signingKeySchema } from '@/lib/data/dto'
import { setRetireAfter } from '@/lib/data/overlays'
import { sql } from '@/lib/db'
import { keyRingSchema, sessionReplySchema } from '@/lib/protocol'
import {
  ask,
  call,
  deliver,
  joinAgent,
  type Member,
  problemOf,
  seedCode,
  sessionBody,
} from '@/tests/support/collector'
import { startTestLeader, type TestLeader } from '@/tests/support/leaders'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { someReport } from '@/tests/support/reports'
import { RingHolder } from '@/tests/support/ring-holder'
import { until } from '@/tests/support/until'

const seeded = overlayPerTest()

let overlayKey: string
const leaders: TestLeader[] = []

beforeEach(async () => {
  overlayKey = (await seeded.em().findOneOrFail(OverlaySchema, seeded.overlay.id)).publicKey
})
afterEach(async () => {
  await Promise.all(leaders.splice(0).map((leader) => leader.stop()))
  await sql(seeded.em(), `update agents set state = 'left'`)
})

const lead = (seed: number, init: Parameters<typeof startTestLeader>[2] = {}) => {
  const leader = startTestLeader(seeded.team.database, seed, init)
  leaders.push(leader)
  return leader
}
const join = async (...names: string[]): Promise<Member[]> => {
  const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: names.length })
  const members: Member[] = []
  for (const name of names) members.push(await joinAgent(code, name))
  return members
}
const holder = (member: Member) => new RingHolder(member, { overlayId: seeded.overlay.id, overlayKey })
const params = () => ({ slug: seeded.overlay.slug })
const signingKey = async () =>
  signingKeySchema.parse(
    await (await ask(keyRoute, 'GET', { bearer: seeded.team.token('operator'), params: params() })).json(),
  )
const rotateAs = (role: 'owner' | 'operator') =>
  ask(rotateRoute, 'POST', { bearer: seeded.team.token(role), params: params() })
const rotate = async () => signingKeySchema.parse(await (await rotateAs('owner')).json())
const eventsOf = async (kind: 'agent-left' | 'key-rotated' | 'agent-left-out' | 'agent-readmitted') =>
  (await seeded.em().find(OverlayEventSchema, { overlayId: seeded.overlay.id, kind })).map(({ text }) => text)

/** Reports go on, one after the other, until it is as wanted. */
async function reportUntil(
  agents: readonly RingHolder[],
  wanted: () => boolean | Promise<boolean>,
): Promise<void> {
  const isSo = async () => {
    for (const agent of agents) await agent.report()
    return wanted()
  }
  await until(isSo, { explain: () => String(wanted) })
}

const setPace = (pace: 'drill' | 'calm') =>
  sql(seeded.em(), 'update overlays set pace = ? where id = ?', [pace, seeded.overlay.id])

/** As a leader after its round. */
async function upkeepOf(holderName: string): Promise<{ look(memory?: Partial<Memory>): Promise<void> }> {
  const store = new LeaderStore(
    { forkEm: async () => seeded.em() },
    { overlayId: seeded.overlay.id, holder: 'leader' },
  )
  const init = { overlayId: seeded.overlay.id, holder: holderName }
  const upkeep = new Upkeep({ forkEm: async () => seeded.em(), clock: systemClock }, init)
  const loaded = (await store.load())!
  return { look: (memory = {}) => upkeep.look(loaded, { ...BLANK_MEMORY, ...memory }) }
}

describe('a new signing key', () => {
  it('takes over without an agent missing orders, and lets the old one go when its passes have ended', async () => {
    lead(1)
    const agents = (await join('tar-01', 'gul-04')).map(holder)
    await reportUntil(agents, () => agents.every(({ sequence }) => sequence > 0))
    const started = await rotate()
    expect(started).toMatchObject({ publicKey: overlayKey, ringVersion: 2, previous: null })
    const next = started.next!.publicKey
    expect(await problemOf(await rotateAs('owner'))).toEqual([409, 'rotation-running'])
    // One that is heard, for a minute at this pace, and has not followed yet keeps the old key in force.
    await leaders.splice(0)[0]!.stop()
    await setPace('calm')
    await agents[0]!.report()
    await agents[0]!.report()
    await new LeaderStore(
      { forkEm: async () => seeded.em() },
      { overlayId: seeded.overlay.id, holder: 'leader' },
    ).claim()
    await (await upkeepOf('leader')).look()
    expect((await signingKey()).publicKey).toBe(overlayKey)
    await setPace('drill')
    lead(2)
    await reportUntil(agents, async () => (await signingKey()).publicKey === next)
    await reportUntil(agents, () =>
      agents.every(({ held, signedBy }) => held.version === 3 && signedBy.at(-1) === next),
    )
    expect(agents.map(({ signedBy, refused }) => [signedBy, refused])).toEqual([
      [[overlayKey, next], []],
      [[overlayKey, next], []],
    ])
    expect(await signingKey()).toMatchObject({
      ringVersion: 3,
      next: null,
      previous: { publicKey: overlayKey },
    })
    const until = Date.parse((await signingKey()).previous!.until)
    const { passEndsAt } = await seeded.em().findOneOrFail(AgentSchema, agents[0]!.member.agentId)
    expect(until).toBeGreaterThanOrEqual(passEndsAt!.getTime())
    await sql(seeded.em(), 'update overlay_keys set until = clock_timestamp() where overlay_id = ?', [
      seeded.overlay.id,
    ])
    await reportUntil(agents, () => agents.every(({ held }) => held.version === 4))
    expect(agents.map(({ held, refused }) => [held.keys, refused])).toEqual([
      [[next], []],
      [[next], []],
    ])
    expect(await eventsOf('key-rotated')).toEqual(['A new key signs passes and orders'])
    expect(seeded.team.failures).toEqual([])
  })

  it('is followed by one that slept through two rotations, and by one that enrols after them', async () => {
    lead(3)
    const [tar, gul] = await join('tar-01', 'gul-04')
    const awake = holder(tar!)
    const asleep = holder(gul!)
    await sql(seeded.em(), 'delete from agent_states where agent_id = ?', [gul!.agentId])
    for (let turn = 0; turn < 2; turn++) {
      const { next } = await rotate()
      await reportUntil([awake], () => awake.signedBy.at(-1) === next!.publicKey)
    }
    const response = await call(sessionRoute, sessionBody(gul!.agentId, gul!.keys))
    const session = sessionReplySchema.parse(await response.json())
    expect(await asleep.takes(session.pass)).toBe(false)
    asleep.follow(session.keyRings ?? [])
    expect([asleep.held, await asleep.takes(session.pass)]).toEqual([awake.held, true])
    const { publicKey } = await seeded.em().findOneOrFail(OverlaySchema, seeded.overlay.id)
    const [eel] = await join('eel-09')
    const late = new RingHolder(eel!, { overlayId: seeded.overlay.id, overlayKey: publicKey })
    await late.report()
    expect(late.held).toEqual(awake.held)
    await late.report()
    expect([late.refused, awake.refused]).toEqual([[], []])
  })

  it('takes over once, whatever leaders do at the same time, and each ring is signed by the one before', async () => {
    await join('tar-01')
    await rotate()
    const turn = () => seeded.em().transactional((tx) => takeOver(tx, seeded.overlay.id))
    await Promise.all([turn(), turn(), turn()])
    const rings = await sql(
      seeded.em(),
      `select version, keys, signed_by as "signedBy", signature from overlay_key_rings where overlay_id = ? order by version`,
      [seeded.overlay.id],
    )
    expect(rings).toHaveLength(2)
    const agent = new RingHolder(
      { agentId: '', name: '', keys: undefined!, token: '' },
      { overlayId: seeded.overlay.id, overlayKey },
    )
    agent.follow(rings.map((ring) => keyRingSchema.parse(ring)))
    expect(agent.held.version).toBe(3)
  })

  it('is for owners to begin and for operators to look at', async () => {
    expect(await problemOf(await rotateAs('operator'))).toEqual([403, 'forbidden'])
    const looked = await ask(keyRoute, 'GET', { bearer: seeded.team.token('viewer'), params: params() })
    expect(await problemOf(looked)).toEqual([403, 'forbidden'])
  })
})

/** A leader still looks for overlays; from one round to the next is longer. */
const withoutNextRound = {
  ...systemClock,
  after: (delayMs: number, run: () => void) =>
    delayMs <= LOOK_MS ? systemClock.after(delayMs, run) : () => {},
}

describe('orders', () => {
  it('name who was revoked at once, before the next round, and say the overlay’s weights', async () => {
    // The next round never comes: what comes was sent for the occasion.
    await setPace('calm')
    const leader = lead(4, { clock: withoutNextRound })
    const [tar, gul] = await join('tar-01', 'gul-04')
    await leader.leads(1)
    const agent = holder(tar!)
    await reportUntil([agent], () => agent.sequence > 0)
    const before = agent.sequence
    await revokeAgent(await seeded.team.callAs('operator'), seeded.overlay.slug, 'gul-04')
    await reportUntil([agent], () => agent.sequence > before)
    expect(agent.shut).toEqual([{ agentId: gul!.agentId, reason: 'revoked' }])
    expect((await agent.report()).signedOrders!.text).toContain('"weights":"unit"')
    expect(leader.failures).toEqual([])
  })

  it('leave out whom a round leaves out, until an operator readmits it', async () => {
    const [tar] = await join('tar-01', 'gul-04')
    const store = new LeaderStore(
      { forkEm: async () => seeded.em() },
      { overlayId: seeded.overlay.id, holder: 'one' },
    )
    const { key } = (await store.load())!
    await store.claim()
    const round = {
      state: { version: 1 as const, control: {} as never, memory: BLANK_MEMORY },
      orders: { sequence: 1 } as never,
      key,
      reading: null,
      events: [],
      rehearsals: [],
    }
    const because = 'its declared births do not fit its walkers'
    expect(await store.write({ ...round, sequence: 1, leftOut: [{ agentId: tar!.agentId, because }] })).toBe(
      true,
    )
    expect(await seeded.em().findOne(AgentSchema, tar!.agentId)).toMatchObject({
      state: 'left-out',
      leftOutBecause: because,
    })
    expect(await eventsOf('agent-left-out')).toEqual([`tar-01 left out: ${because}`])
    const loaded: Loaded = (await store.load())!
    expect(loaded.shut).toEqual([{ agentId: tar!.agentId, reason: 'left-out' }])
    expect([loaded.leftOutNames, loaded.snapshot.agents.map(({ name }) => name)]).toEqual([
      [{ name: 'tar-01', because }],
      ['gul-04'],
    ])
    // Once out, a second word for it changes nothing.
    expect(await store.write({ ...round, sequence: 2, leftOut: [{ agentId: tar!.agentId, because }] })).toBe(
      true,
    )
    expect(await eventsOf('agent-left-out')).toHaveLength(1)
    await readmitAgent(await seeded.team.callAs('operator'), seeded.overlay.slug, 'tar-01')
    expect(await seeded.em().findOne(AgentSchema, tar!.agentId)).toMatchObject({
      state: 'joined',
      leftOutBecause: null,
    })
    expect((await store.load())?.shut).toEqual([])
  })
})

describe('agents unheard for longer than the overlay allows', () => {
  const names = ['tar-01', 'tar-02', 'gul-04', 'pin-02']
  const look = async (holderName: string, listeningSinceMs: number) => {
    const upkeep = await upkeepOf(holderName)
    await upkeep.look({ listeningSinceMs })
    // At most once a minute.
    await upkeep.look({ listeningSinceMs: 0 })
  }
  const joined = async () =>
    (await seeded.em().find(AgentSchema, { overlay: seeded.overlay.id, state: 'joined' }))
      .map(({ name }) => name)
      .sort()

  it('are retired by whoever leads, while it has been listening, and said', async () => {
    const members = await join(...names)
    for (const member of members) await deliver(member, someReport(1))
    const store = new LeaderStore(
      { forkEm: async () => seeded.em() },
      { overlayId: seeded.overlay.id, holder: 'leader' },
    )
    await store.claim()
    await sql(
      seeded.em(),
      `update agent_states set received_at = clock_timestamp() - interval '3 hours' where agent_id = ?`,
      [members[3]!.agentId],
    )
    await look('leader', 0)
    expect(await joined()).toEqual([...names].sort())
    await setRetireAfter(await seeded.team.callAs('operator'), seeded.overlay.slug, 2)
    await look('leader', Date.now() - 1_000)
    await look('another', 0)
    expect(await joined()).toEqual([...names].sort())
    await look('leader', 0)
    expect(await joined()).toEqual(['gul-04', 'tar-01', 'tar-02'])
    expect(await eventsOf('agent-left')).toEqual(['pin-02 retired: unheard for 2 hours'])
    expect(
      await problemOf(await call(sessionRoute, sessionBody(members[3]!.agentId, members[3]!.keys))),
    ).toEqual([403, 'agent-ended'])
  })
})
