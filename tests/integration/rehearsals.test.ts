import { describe, expect, it } from 'vitest'
import { DELETE as cancel, GET as read } from '@/app/api/v1/overlays/[slug]/rehearsals/[id]/route'
import { GET as list, POST as start } from '@/app/api/v1/overlays/[slug]/rehearsals/route'
import { AuditEntrySchema, IncidentEntrySchema, OverlayEventSchema, OverlaySchema } from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { rehearsalSchema, rehearsalsSchema } from '@/lib/data/rehearsal-dto'
import type { RouteHandler } from '@/lib/http/route'
import { ask, joinAgent, problemOf, seedCode } from '@/tests/support/collector'
import { seedIncident } from '@/tests/support/incidents'
import { overlayPerTest } from '@/tests/support/overlay-per-test'

const seeded = overlayPerTest()
type Init = { id?: string; body?: unknown }
const as = (role: Role, handler: RouteHandler, method: string, { id, body }: Init = {}) =>
  ask(handler, method, {
    bearer: seeded.team.token(role),
    params: { slug: seeded.overlay.slug, ...(id === undefined ? {} : { id }) },
    ...(body === undefined ? {} : { body }),
  })
const join = async (names: readonly string[]) => {
  const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: names.length })
  for (const name of names)
    await joinAgent(code, name, { office: name.startsWith('tar') ? 'Tarnwick' : 'Eelholm' })
}
const made = async (body: object) =>
  rehearsalSchema.parse(await (await as('operator', start, 'POST', { body })).json())
const detailOf = async (body: object): Promise<string> => {
  const response = await as('operator', start, 'POST', { body })
  const problem: { detail: string } = await response.json()
  return `${response.status} ${problem.detail}`
}
const events = () =>
  seeded.em().find(OverlayEventSchema, { overlayId: seeded.overlay.id }, { orderBy: { id: 'asc' } })

describe('a rehearsal', () => {
  it('is asked for with nothing but what is to be away, listed, read and cancelled, and leaves an audit entry', async () => {
    await join(['tar-01', 'tar-02', 'eel-01', 'eel-02'])
    const asked = await made({ exclude: { nodes: ['tar-01'] } })
    expect(asked).toMatchObject({
      state: 'waiting',
      progress: 0,
      by: 'operator 1',
      exclude: { nodes: ['tar-01'], links: [], labels: [], between: [] },
      startsAt: null,
      reading: null,
      verdict: null,
    })
    const listed = rehearsalsSchema.parse(await (await as('viewer', list, 'GET')).json())
    expect(listed).toEqual({ items: [asked], most: 3, mayStart: false })
    expect(await (await as('viewer', read, 'GET', { id: asked.id })).json()).toEqual(asked)
    const over = rehearsalSchema.parse(
      await (await as('operator', cancel, 'DELETE', { id: asked.id })).json(),
    )
    expect(over).toMatchObject({ id: asked.id, state: 'cancelled' })
    expect(await problemOf(await as('operator', cancel, 'DELETE', { id: asked.id }))).toEqual([
      409,
      'rehearsal-over',
    ])
    const audited = await seeded
      .em()
      .find(AuditEntrySchema, { subject: `${seeded.overlay.slug}: tar-01` }, { orderBy: { id: 'asc' } })
    expect(audited.slice(1).map(({ action, outcome }) => [action, outcome])).toEqual([
      ['rehearsal.start', 'ok'],
      ['rehearsal.cancel', 'ok'],
      ['rehearsal.cancel', 'denied'],
    ])
  })

  it('that is planned and kept on an incident enters its end in both timelines', async () => {
    await join(['tar-01', 'tar-02', 'eel-01', 'eel-02'])
    const { overlay, team } = seeded
    const incident = await seedIncident(seeded.em(), {
      overlayId: overlay.id,
      teamId: team.teamId,
      raisedAt: new Date(),
    })
    const body = {
      exclude: { labels: [{ key: 'office', value: 'Tarnwick' }] },
      incident: incident.number,
      startsAt: '2040-01-04T22:00:00.000Z',
      note: 'New radios',
    }
    const planned = await made(body)
    expect(planned).toMatchObject({ incident: incident.number, startsAt: body.startsAt, note: 'New radios' })
    await as('operator', cancel, 'DELETE', { id: planned.id })
    const said = 'all nodes with office Tarnwick away'
    expect((await events()).map(({ kind, text }) => [kind, text]).slice(-2)).toEqual([
      ['rehearsal-planned', `Rehearsal planned: ${said}`],
      ['rehearsal-ended', `Rehearsal cancelled: ${said}`],
    ])
    const entries = await seeded.em().find(IncidentEntrySchema, { incident: incident.id, kind: 'rehearsal' })
    expect(entries.map(({ text }) => text)).toEqual([`Rehearsal cancelled: ${said}`])
  })

  it('is refused with the names that are not known, with nothing, with all nodes and with all but one', async () => {
    await join(['tar-01', 'tar-02', 'eel-01'])
    expect([
      await detailOf({ exclude: { nodes: ['tar-01', 'tar-07', 'eel-99'] } }),
      await detailOf({ exclude: { labels: [{ key: 'office', value: 'Gullhythe' }] } }),
      await detailOf({ exclude: {} }),
      await detailOf({ exclude: { nodes: ['tar-01', 'tar-02', 'eel-01'] } }),
      await detailOf({ exclude: { nodes: ['tar-01', 'tar-02'] } }),
      await detailOf({ exclude: { links: [['tar-01', 'tar-02']] } }),
      await detailOf({ exclude: { nodes: ['tar-01'] }, incident: 987_654 }),
    ]).toEqual([
      '400 No node of this overlay is called tar-07 and eel-99. Choose nodes that have joined.',
      '400 No node has office Gullhythe.',
      '400 Say which nodes, labels or links are to be away.',
      '400 No node would remain. Leave at least 2.',
      '400 One node would remain. Leave at least 2.',
      '400 There is no link tar-01 – tar-02 now. Choose links that are measured.',
      '400 There is no incident 987654 of this overlay and of the team you act for.',
    ])
    expect(
      await problemOf(await as('viewer', start, 'POST', { body: { exclude: { nodes: ['tar-01'] } } })),
    ).toEqual([403, 'forbidden'])
    expect(await problemOf(await as('viewer', read, 'GET', { id: 'none' }))).toEqual([404, 'not-found'])
  })

  it.each(['sealed', 'flagged'] as const)(
    'takes nodes, but neither links nor most of the nodes, in overlays that are %s',
    async (disclosure) => {
      await join(['tar-01', 'tar-02', 'tar-03', 'eel-01', 'eel-02'])
      await seeded.em().nativeUpdate(OverlaySchema, { id: seeded.overlay.id }, { disclosure })
      const asked = await as('operator', start, 'POST', { body: { exclude: { nodes: ['tar-01'] } } })
      expect(asked.status).toBe(201)
      expect(await detailOf({ exclude: { links: [['tar-01', 'tar-02']] } })).toBe(
        `400 This overlay is ${disclosure}: without a link its walkers would tell whether it is there. Take nodes or labels away, or rehearse links in a named overlay.`,
      )
      expect(await detailOf({ exclude: { nodes: ['tar-01', 'tar-02', 'eel-01'] } })).toBe(
        `400 2 of 5 nodes would remain. This overlay is ${disclosure}: what holds a few nodes together would tell their links, so at least half must remain.`,
      )
    },
  )
})
