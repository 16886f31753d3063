import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { GET as getRoute } from '@/app/api/v1/incidents/[number]/route'
import { GET as listRoute } from '@/app/api/v1/incidents/route'
import { GET as overlayRoute } from '@/app/api/v1/overlays/[slug]/incidents/route'
import type { Role } from '@/lib/auth/permissions'
import {
  handOverIncident,
  muteIncident,
  noteOnIncident,
  reopenIncident,
  resolveIncident,
  takeIncident,
  unmuteIncident,
} from '@/lib/data/incident-acts'
import { getIncident, listIncidents } from '@/lib/data/incidents'
import { incidentsSchema, incidentWholeSchema } from '@/lib/data/warn-dto'
import { sql } from '@/lib/db'
import type { NewMessage } from '@/lib/notify/outbox'
import { ask, problemOf, seedOverlay } from '@/tests/support/collector'
import { seedIncident, seedTold } from '@/tests/support/incidents'
import { callAsUser, seedTeam } from '@/tests/support/people'
import { openTestTeam, type TestTeam } from '@/tests/support/team'

const AT = new Date('2026-11-20T01:00:00.000Z')
const minutesOn = (minutes: number) => new Date(AT.getTime() + minutes * 60_000)
let team: TestTeam
let overlay: { id: string; slug: string }
let count = 0
let told: NewMessage[] = []
const components = {
  enqueue: async (_em: unknown, messages: readonly NewMessage[]) => {
    told.push(...messages)
  },
}
const em = () => team.database.orm.em.fork()
const userIds: Partial<Record<Role, string>> = {}

beforeAll(async () => {
  team = await openTestTeam()
  for (const role of ['owner', 'operator', 'viewer'] as const) {
    const { caller } = await team.callAs(role)
    userIds[role] = 'userId' in caller ? caller.userId : ''
  }
})
afterAll(() => team.close())
beforeEach(async () => {
  overlay = await seedOverlay(team.database, team.teamId, { slug: `tides-${count++}` })
  told = []
})

const seed = (over: Partial<Parameters<typeof seedIncident>[1]> = {}) =>
  seedIncident(em(), { overlayId: overlay.id, teamId: team.teamId, raisedAt: AT, ...over })
/** As the wrappers do it: one transaction, at a moment of the test. */
async function as<T>(
  role: Role,
  now: Date,
  act: (call: Awaited<ReturnType<TestTeam['callAs']>>) => Promise<T>,
) {
  const call = await team.callAs(role)
  return call.em.transactional((tx) => act({ ...call, em: tx, now }), { clear: true })
}
const whole = async (number: number) =>
  incidentWholeSchema.parse(await getIncident(await team.callAs('viewer'), number))
const timeline = async (number: number) =>
  (await whole(number)).entries.map(({ kind, text, by }) => [kind, text, by?.name ?? null])
const refusal = (promise: Promise<unknown>) =>
  promise.then(
    () => 'done',
    (error: { code: string; detail: string }) => [error.code, error.detail],
  )

describe('an incident', () => {
  it('is taken once: who has it is shown, entered, and told to those who were told of it', async () => {
    const { number, id } = await seed()
    const viewer = { incidentId: id, teamId: team.teamId, userId: userIds.viewer!, at: AT }
    await seedTold(em(), { ...viewer, address: 'viewer@harbourline.example' })
    await seedTold(em(), { ...viewer, userId: userIds.operator!, address: 'operator@harbourline.example' })
    const dto = await as('operator', minutesOn(4), (call) => takeIncident(call, number, components))
    expect(dto).toMatchObject({
      state: 'held',
      holder: { id: userIds.operator, name: 'operator 1' },
      heldSince: minutesOn(4).toISOString(),
    })
    expect(await timeline(number)).toEqual([
      ['raised', 'Few links left: 2 links hold the sides together.', null],
      ['taken', 'operator 1 has it', 'operator 1'],
    ])
    expect(told).toMatchObject([
      {
        kind: 'taken',
        to: { userId: userIds.viewer },
        incidentId: id,
        body: { holder: 'operator 1', incident: { number }, overlay: { slug: overlay.slug } },
      },
    ])
    const again = (role: Role) =>
      refusal(as(role, minutesOn(5), (call) => takeIncident(call, number, components)))
    expect(await again('operator')).toEqual([
      'incident-state',
      'You have it already. Hand it over to give it away.',
    ])
    expect(await again('owner')).toEqual([
      'incident-state',
      expect.stringContaining('operator 1 has it already'),
    ])
    expect(await timeline(number)).toHaveLength(2)
    expect(told).toHaveLength(1)
  })

  it('of two who take it at once goes to one of them', async () => {
    const { number } = await seed()
    const outcomes = await Promise.all(
      (['operator', 'owner'] as const).map((role) =>
        refusal(as(role, minutesOn(1), (call) => takeIncident(call, number, components))),
      ),
    )
    expect(outcomes.filter((outcome) => outcome === 'done')).toHaveLength(1)
    expect((await timeline(number)).filter(([kind]) => kind === 'taken')).toHaveLength(1)
  })

  it('is handed over to who may act on it, who hears of it; to oneself it is taken over', async () => {
    const { number } = await seed()
    await as('operator', minutesOn(1), (call) => takeIncident(call, number, components))
    const hand = (role: Role, to: Role) =>
      refusal(
        as(role, minutesOn(2), (call) =>
          handOverIncident(call, number, { userId: userIds[to]! }, components),
        ),
      )
    expect(await hand('operator', 'viewer')).toEqual([
      'invalid-input',
      expect.stringContaining('operator or owner'),
    ])
    expect(await hand('operator', 'owner')).toBe('done')
    expect(await hand('operator', 'owner')).toEqual(['incident-state', 'owner 0 has it already.'])
    expect(await hand('operator', 'operator')).toBe('done')
    expect((await timeline(number)).slice(2)).toEqual([
      ['handed-over', 'operator 1 handed it over to owner 0', 'operator 1'],
      ['handed-over', 'operator 1 took it over from owner 0', 'operator 1'],
    ])
    expect(told.map(({ kind, to }) => [kind, to])).toEqual([['taken', { userId: userIds.owner }]])
    expect((await whole(number)).people.map(({ name }) => name)).toEqual(['operator 1', 'owner 0'])
  })

  it('that is muted tells nobody until that ends', async () => {
    const { number, id } = await seed()
    await seedTold(em(), {
      ...{ incidentId: id, teamId: team.teamId, at: AT },
      ...{ userId: userIds.viewer!, address: 'viewer@harbourline.example' },
    })
    const mute = { minutes: 30, because: 'Cable work at Gullhythe' }
    const dto = await as('operator', AT, (call) => muteIncident(call, number, mute))
    expect([dto.mutedUntil, dto.mutedBecause]).toEqual([minutesOn(30).toISOString(), mute.because])
    await as('operator', minutesOn(29), (call) => takeIncident(call, number, components))
    expect(told).toEqual([])
    await as('owner', minutesOn(29), (call) => unmuteIncident(call, number))
    expect(await refusal(as('owner', minutesOn(29), (call) => unmuteIncident(call, number)))).toEqual([
      'incident-state',
      'It is not muted.',
    ])
    const over = { userId: userIds.owner! }
    await as('owner', minutesOn(30), (call) => handOverIncident(call, number, over, components))
    expect(told.map(({ to }) => to)).toEqual([{ userId: userIds.viewer }])
    expect((await timeline(number)).map(([kind]) => kind)).toEqual([
      'raised',
      'muted',
      'taken',
      'unmuted',
      'handed-over',
    ])
  })

  it('is resolved only when it has cleared, and then takes notes but nobody', async () => {
    const { number, id } = await seed()
    const resolve = () =>
      refusal(
        as('operator', minutesOn(9), (call) => resolveIncident(call, number, 'A loose plug', components)),
      )
    expect(await resolve()).toEqual(['incident-state', expect.stringContaining('still holds')])
    await sql(em(), `update incidents set cleared_at = ?, rules = '{}' where id = ?`, [minutesOn(8), id])
    expect(await resolve()).toBe('done')
    expect(await resolve()).toEqual(['incident-state', 'It is resolved. Reopen it first.'])
    const late = [
      (call: Parameters<typeof takeIncident>[0]) => takeIncident(call, number, components),
      (call: Parameters<typeof takeIncident>[0]) =>
        muteIncident(call, number, { minutes: 5, because: 'quiet' }),
    ]
    for (const act of late)
      expect(await refusal(as('operator', minutesOn(10), act))).toEqual([
        'incident-state',
        'It is resolved. Reopen it first.',
      ])
    await as('operator', minutesOn(11), (call) => noteOnIncident(call, number, 'The plug is replaced.'))
    expect((await timeline(number)).slice(1)).toEqual([
      ['resolved', 'operator 1 resolved it: A loose plug', 'operator 1'],
      ['note', 'The plug is replaced.', 'operator 1'],
    ])
  })

  it('is reopened unless another of the overlay is not resolved', async () => {
    const { number } = await seed({ clearedAt: minutesOn(5), resolvedAt: minutesOn(6) })
    const later = await seed({ raisedAt: minutesOn(20) })
    const reopen = () =>
      refusal(as('owner', minutesOn(30), (call) => reopenIncident(call, number, 'It came back', components)))
    expect(await reopen()).toEqual([
      'incident-state',
      expect.stringContaining(`Incident ${later.number} of ${overlay.slug} is not resolved yet`),
    ])
    await sql(em(), `update incidents set cleared_at = ?, resolved_at = ? where id = ?`, [
      ...[minutesOn(25), minutesOn(26)],
      later.id,
    ])
    expect(await reopen()).toBe('done')
    expect(await reopen()).toEqual(['incident-state', 'It is not resolved.'])
    expect(await whole(number)).toMatchObject({ state: 'cleared', resolvedAt: null })
  })

  it('says what is raised in it, who was told, and what may be done by whom', async () => {
    const { number, id } = await seed({ momentAt: AT, severity: 'urgent' })
    await seedTold(em(), {
      ...{ incidentId: id, teamId: team.teamId, at: minutesOn(1) },
      ...{ userId: userIds.operator!, address: 'operator@harbourline.example' },
    })
    expect(await whole(number)).toMatchObject({
      severity: 'urgent',
      state: 'open',
      role: 'viewer',
      momentAt: AT.toISOString(),
      raised: ['at most 2 links between the sides'],
      told: [
        {
          at: minutesOn(1).toISOString(),
          to: 'operator 1',
          by: 'email',
          what: 'that it was raised',
          state: 'sent',
        },
      ],
    })
  })
})

describe('who may', () => {
  it('act on an incident is an operator or owner of its team', async () => {
    const { number } = await seed({ clearedAt: minutesOn(1) })
    const acts = [
      (call: Parameters<typeof takeIncident>[0]) => takeIncident(call, number, components),
      (call: Parameters<typeof takeIncident>[0]) =>
        handOverIncident(call, number, { userId: userIds.owner! }, components),
      (call: Parameters<typeof takeIncident>[0]) => noteOnIncident(call, number, 'x'),
      (call: Parameters<typeof takeIncident>[0]) => muteIncident(call, number, { minutes: 5, because: 'x' }),
      (call: Parameters<typeof takeIncident>[0]) => unmuteIncident(call, number),
      (call: Parameters<typeof takeIncident>[0]) => resolveIncident(call, number, 'x', components),
      (call: Parameters<typeof takeIncident>[0]) => reopenIncident(call, number, 'x', components),
    ]
    const others = await seedTeam(em(), `gullhythe-${count}`, ['owner'], AT)
    for (const act of acts) {
      expect((await refusal(as('viewer', AT, act)))[0]).toBe('forbidden')
      const stranger = await callAsUser(team.database, others.members[0]!.userId, AT)
      expect((await refusal(act(stranger)))[0]).toBe('not-found')
    }
    expect(await timeline(number)).toHaveLength(1)
  })
})

describe('the list', () => {
  it('has pages, newest first, and each state by itself', async () => {
    const numbers: number[] = []
    const seedNext = async (over: Parameters<typeof seed>[0]) => numbers.push((await seed(over)).number)
    await seedNext({ clearedAt: AT, resolvedAt: AT })
    await seedNext({ clearedAt: AT, resolvedAt: AT })
    await seedNext({})
    const query = (over: string) =>
      ask(overlayRoute, 'GET', { bearer: team.token('viewer'), params: { slug: overlay.slug }, query: over })
    const page = async (over: string) => incidentsSchema.parse(await (await query(over)).json())
    const first = await page('?limit=2')
    expect([first.items.map(({ number }) => number), first.next]).toEqual([
      [numbers[2], numbers[1]],
      String(numbers[1]),
    ])
    const second = await page(`?limit=2&after=${first.next}`)
    expect([second.items.map(({ number }) => number), second.next]).toEqual([[numbers[0]], null])
    const states = async (state: string) => (await page(`?state=${state}`)).items.map(({ number }) => number)
    expect(await states('resolved')).toEqual([numbers[1], numbers[0]])
    expect([await states('open'), await states('unresolved')]).toEqual([[numbers[2]], [numbers[2]]])
    expect([await states('held'), await states('cleared')]).toEqual([[], []])
    expect(await problemOf(await query('?state=lost'))).toEqual([400, 'invalid-input'])
  })

  it('shows each team its own, and an incident of another team is not there', async () => {
    const { number } = await seed()
    const others = await seedTeam(em(), `pinnet-${count}`, ['owner'], AT)
    const stranger = await callAsUser(team.database, others.members[0]!.userId, AT)
    expect((await listIncidents(stranger, { limit: 100 })).items).toEqual([])
    expect((await refusal(getIncident(stranger, number)))[0]).toBe('not-found')
    const mine = await ask(listRoute, 'GET', { bearer: team.token('viewer'), query: '?state=unresolved' })
    expect(incidentsSchema.parse(await mine.json()).items.map((one) => one.number)).toContain(number)
    const one = await ask(getRoute, 'GET', {
      bearer: team.token('viewer'),
      params: { number: String(number) },
    })
    expect(incidentWholeSchema.parse(await one.json()).number).toBe(number)
    for (const wrong of ['999999', '0', 'twelve'])
      expect(
        (await ask(getRoute, 'GET', { bearer: team.token('viewer'), params: { number: wrong } })).status,
      ).toBe(wrong === '999999' ? 404 : 400)
    expect(team.failures).toEqual([])
  })
})
