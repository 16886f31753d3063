import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import type { Ending } from '@/agent'
import { AgentSchema, AgentStateSchema } from '@/entities'
import { revokeAgent } from '@/lib/data/agents'
import { rotateSigningKey } from '@/lib/data/signing-key'
import { parseEdgeList } from '@/lib/topology'
import type { Fleet } from '@/scripts/fleet/fleet'
import { seedCode, seedOverlay } from '../support/collector'
import { startTestLeader, type TestLeader } from '../support/leaders'
import { type RouteFleet, startRouteFleet } from '../support/route-fleet'
import { openTestTeam, type TestTeam } from '../support/team'
import { eventually, until, within } from '../support/until'

/** A ring of six with a chord. */
const EDGES = [
  'tar-01,tar-02',
  'tar-02,gul-04',
  'gul-04,gul-05',
  'gul-05,eel-08',
  'eel-08,eel-09',
  'eel-09,tar-01',
  'tar-02,eel-08',
].join('\n')

const never = new AbortController().signal
describe('agents of today and the collector of today', () => {
  let team: TestTeam
  let overlay: { id: string; slug: string }
  let leader: TestLeader
  let running: RouteFleet
  let fleet: Fleet
  const endings: { name: string; ending: Ending }[] = []

  beforeAll(async () => {
    team = await openTestTeam()
    overlay = await seedOverlay(team.database, team.teamId, { slug: 'tides' })
    leader = startTestLeader(team.database, 7)
    const topology = parseEdgeList(EDGES)
    if (!topology.ok) throw new Error('bad edges')
    running = await startRouteFleet('agents and collector', {
      topology: topology.graph,
      code: await seedCode(team.database, overlay.id, { uses: 6 }),
      onEnded: (name, ending) => endings.push({ name, ending }),
    })
    fleet = running.fleet
  })
  afterAll(async () => {
    await running.close()
    await leader.stop()
    await team.close()
  })

  const em = () => team.database.orm.em.fork()
  const agent = (name: string) => fleet.member(name).agent!
  const status = (name: string) => agent(name).status()
  const stateOf = (name: string) => em().findOneOrFail(AgentStateSchema, fleet.member(name).agentId)
  const rowOf = (name: string) => em().findOneOrFail(AgentSchema, fleet.member(name).agentId)

  test('follow each other: signed orders, receipts, health', async () => {
    // Orders may come from a neighbour before an agent's own first report is stored.
    await until(() => fleet.names.every((name) => !status(name).frozen && status(name).reports.delivered > 0))
    await eventually(async () => {
      const { node } = await stateOf('tar-01')
      expect(node.health).toMatchObject({ linkKind: 'path', keyRing: 1, source: null, upgrade: null })
      expect(status('tar-01').reports.lastError).toBeNull()
    })
  })

  test('reports come packed', async () => {
    const packed = new Promise<string | undefined>((resolve) =>
      running.server.on('request', ({ url, headers }) => {
        if (url === '/api/agent/report' && headers['content-encoding']) resolve(headers['content-encoding'])
      }),
    )
    expect(await within('a packed report', packed)).toBe('gzip')
    const { delivered, failed } = status('tar-01').reports
    await until(() => status('tar-01').reports.delivered > delivered + 2)
    expect(status('tar-01').reports.failed).toBe(failed)
  })

  test('a report goes round by a neighbour where the agent’s own way is cut', async () => {
    fleet.detour('gul-05')
    await until(async () => (await stateOf('gul-05')).relayed === true)
    const { reportNumber } = await stateOf('gul-05')
    await until(async () => Number((await stateOf('gul-05')).reportNumber) > Number(reportNumber) + 2)
    await until(() => status('gul-05').reports.relayed > 2)
    await eventually(() => expect(status('gul-05')).toMatchObject({ distance: 1, frozen: false }))
    fleet.hear('gul-05')
    await until(async () => (await stateOf('gul-05')).relayed !== true)
  })

  test('the overlay’s key and an agent’s own are replaced while all goes on', async () => {
    fleet.detour('gul-05')
    await until(async () => (await stateOf('gul-05')).relayed === true)
    await rotateSigningKey(await team.callAs('owner'), overlay.slug)
    await until(() => fleet.names.every((name) => status(name).keyRing > 1))
    fleet.hear('gul-05')
    const before = (await rowOf('tar-02')).publicKey
    expect(await agent('tar-02').rotateKey(never)).toMatchObject({ ok: true })
    expect((await rowOf('tar-02')).publicKey).not.toBe(before)
    const { delivered } = status('tar-02').reports
    await until(() => status('tar-02').reports.delivered > delivered + 2)
    await until(() => status('tar-02').links.every(({ up }) => up))
    await until(() => fleet.names.every((name) => !status(name).frozen))
  })

  test('one that leaves is gone, one that is revoked is told so and shut out', async () => {
    expect(await agent('eel-09').leave(never, 'moved')).toMatchObject({ ok: true })
    expect((await rowOf('eel-09')).state).toBe('left')
    await revokeAgent(await team.callAs('operator'), overlay.slug, 'gul-04')
    await until(() => endings.length > 0)
    expect(endings).toMatchObject([{ name: 'gul-04' }])
    await until(() => !agent('tar-02').isLinked(fleet.member('gul-04').agentId))
    expect(leader.failures).toEqual([])
  })
})
