import { describe, expect, it } from 'vitest'
import { PATCH as change, DELETE as remove } from '@/app/api/v1/overlays/[slug]/rules/[id]/route'
import { POST as preview } from '@/app/api/v1/overlays/[slug]/rules/preview/route'
import { POST as create, GET as list } from '@/app/api/v1/overlays/[slug]/rules/route'
import { DELETE as end } from '@/app/api/v1/overlays/[slug]/windows/[id]/route'
import { POST as plan, GET as windows } from '@/app/api/v1/overlays/[slug]/windows/route'
import {
  AuditEntrySchema,
  CallOrderSchema,
  IncidentEntrySchema,
  IncidentSchema,
  WarningRuleSchema,
} from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { previewRule } from '@/lib/data/rule-preview'
import {
  maintenanceWindowSchema,
  maintenanceWindowsSchema,
  rulePreviewSchema,
  warningRuleSchema,
  warningRulesSchema,
} from '@/lib/data/rules-dto'
import { sql } from '@/lib/db'
import type { RouteHandler } from '@/lib/http/route'
import { ask, problemOf, seedOverlay } from '@/tests/support/collector'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { seedTeam } from '@/tests/support/people'

const seeded = overlayPerTest()
type Init = { id?: string; body?: unknown; slug?: string }
const as = (role: Role, handler: RouteHandler, method: string, { id, body, slug }: Init = {}) =>
  ask(handler, method, {
    bearer: seeded.team.token(role),
    params: { slug: slug ?? seeded.overlay.slug, ...(id === undefined ? {} : { id }) },
    ...(body === undefined ? {} : { body }),
  })

const RULE = {
  settings: { kind: 'floor', floor: { of: 'value', lambda2: 0.5 } },
  severity: 'warning',
  onDelaySeconds: 180,
  clearMarginPercent: 10,
  offDelaySeconds: 120,
  isOn: true,
  callOrderId: null,
}
const make = async (body: object = RULE) =>
  warningRuleSchema.parse(await (await as('operator', create, 'POST', { body })).json())
const raised = { is: 'raised' as const, sinceMs: 1_000 }
const stateOf = async (id: string) => (await seeded.em().findOneOrFail(WarningRuleSchema, id)).state

describe('a rule', () => {
  it('is made, listed in words, changed and removed, with what it was and became in the audit log', async () => {
    const made = await make()
    const all = warningRulesSchema.parse(await (await as('viewer', list, 'GET')).json())
    expect([all.items, all.sentence]).toEqual([
      [made],
      '1 rule watches this overlay. None is raised. Nobody would be told: no rule has a call order.',
    ])
    expect(made).toMatchObject({ sentence: 'The core reading is under 0.5.', said: 'clear', state: 'clear' })
    const changed = await as('operator', change, 'PATCH', { id: made.id, body: { severity: 'urgent' } })
    expect(warningRuleSchema.parse(await changed.json())).toEqual({ ...made, severity: 'urgent' })
    expect((await as('operator', remove, 'DELETE', { id: made.id })).status).toBe(204)
    const entries = await seeded
      .em()
      .find(
        AuditEntrySchema,
        { action: 'rule.change', subject: `${seeded.overlay.slug}: The core reading is under 0.5.` },
        { orderBy: { id: 'asc' } },
      )
    expect(entries.map(({ data }) => data)).toEqual([
      { after: RULE },
      { before: RULE, after: { ...RULE, severity: 'urgent' } },
      { before: { ...RULE, severity: 'urgent' }, after: null },
    ])
  })

  it('that is raised stays so when it is changed, and leaves its incident when it is turned off', async () => {
    const { id } = await make()
    const em = seeded.em()
    await em.nativeUpdate(WarningRuleSchema, { id }, { state: raised })
    const [incident] = await sql<{ id: string }>(
      em,
      `insert into incidents (overlay_id, team_id, severity, sentence, raised_at, rules)
       values (?, ?, 'warning', 'Low reading.', now(), array[?::uuid]) returning id`,
      [seeded.overlay.id, seeded.team.teamId, id],
    )
    await as('operator', change, 'PATCH', { id, body: { offDelaySeconds: 60 } })
    expect(await stateOf(id)).toEqual(raised)
    await as('operator', change, 'PATCH', { id, body: { isOn: false } })
    expect(await stateOf(id)).toEqual({ is: 'clear' })
    const left = await seeded.em().findOneOrFail(IncidentSchema, incident!.id)
    expect([left.rules, left.clearedAt]).toEqual([[], expect.any(Date)])
    const entries = await seeded.em().find(IncidentEntrySchema, { incident: incident!.id })
    expect(entries.map(({ kind, text }) => [kind, text])).toEqual([
      ['cleared-all', 'The rule “The core reading is under 0.5.” was turned off.'],
    ])
  })

  it('whose delay runs begins it anew when it looks for something else, and not when others are told', async () => {
    const { id } = await make()
    const rising = { is: 'rising' as const, sinceMs: 1_000 }
    await seeded.em().nativeUpdate(WarningRuleSchema, { id }, { state: rising })
    await as('operator', change, 'PATCH', { id, body: { severity: 'note' } })
    expect(await stateOf(id)).toEqual(rising)
    await as('operator', change, 'PATCH', { id, body: { onDelaySeconds: 240 } })
    expect(await stateOf(id)).toEqual({ is: 'clear' })
  })

  it('is refused to viewers, of other teams, of another kind, and with another team’s call order', async () => {
    const { id } = await make()
    const em = seeded.em()
    const other = await seedTeam(em, `gullhythe-${seeded.overlay.slug}`, ['owner'], new Date())
    const order = em.create(CallOrderSchema, {
      team: other.teamId,
      name: 'x',
      steps: [],
      createdAt: new Date(),
    })
    await em.flush()
    const slug = `theirs-${seeded.overlay.slug}`
    await seedOverlay(seeded.team.database, other.teamId, { slug })
    const refusals = [
      as('viewer', create, 'POST', { body: RULE }),
      as('viewer', remove, 'DELETE', { id }),
      as('owner', list, 'GET', { slug }),
      as('owner', preview, 'POST', { slug, body: { rule: RULE, range: '24h' } }),
      as('owner', change, 'PATCH', { slug, id, body: { isOn: false } }),
      as('operator', change, 'PATCH', { id, body: { settings: { kind: 'split' } } }),
      as('operator', create, 'POST', { body: { ...RULE, callOrderId: order.id } }),
      as('operator', change, 'PATCH', { id: 'x', body: {} }),
    ]
    expect(await Promise.all((await Promise.all(refusals)).map(problemOf))).toEqual([
      [403, 'forbidden'],
      [403, 'forbidden'],
      [404, 'not-found'],
      [404, 'not-found'],
      [404, 'not-found'],
      [400, 'invalid-input'],
      [400, 'invalid-input'],
      [404, 'not-found'],
    ])
  })
})

describe('trying a rule on history', () => {
  const startMs = Date.parse('2026-12-01T10:00:00Z')
  const now = new Date(startMs + 20 * 60_000)
  /** A reading each minute; null: nothing is kept of it. */
  const VALUES = [1, 1, 0.4, 0.4, 0.4, 0.4, 0.4, 0.52, 1, 1, 1, null, null, 1, 0.4, 1, 1, 1, 1, 1]
  const rolled = async (table: string, values: readonly (number | null)[], partMs: number) => {
    for (const [index, value] of values.entries())
      if (value !== null)
        await sql(
          seeded.em(),
          `insert into ${table} (overlay_id, at, readings, valued, fresh, least, most, mean, fresh_median, low, high, level, data, heard, joined, crossing_links, demo)
           values (?, ?, 30, 30, 30, ?, ?, ?, ?, ?, ?, 'firm', 'fresh', 36, 36, 4, false)`,
          [seeded.overlay.id, new Date(startMs + index * partMs), ...Array(6).fill(value)],
        )
  }

  it('says when it would have been raised and cleared, and what is not known', async () => {
    await rolled('reading_minutes', VALUES, 60_000)
    const call = { ...(await seeded.team.callAs('viewer')), now }
    await sql(
      seeded.em(),
      `insert into roll_ups values ('minutes', ?) on conflict (into_what) do update set through = excluded.through`,
      [now],
    )
    const tried = rulePreviewSchema.parse(
      await previewRule(call, seeded.overlay.slug, {
        rule: { ...RULE, settings: { kind: 'floor', floor: { of: 'value', lambda2: 0.5 } } },
        range: '7d',
      }),
    )
    const week = 7 * 86_400
    expect({ ...tried, points: tried.points.length, notes: tried.notes.length }).toEqual({
      from: '2026-11-24T10:20:00.000Z',
      to: '2026-12-01T10:20:00.000Z',
      stepSeconds: 60,
      // Under from 10:02 on; back past the margin from 10:08 on, for two minutes.
      spans: [{ raisedAt: '2026-12-01T10:05:00.000Z', clearedAt: '2026-12-01T10:10:00.000Z' }],
      unknownSeconds: week - 18 * 60,
      sentence:
        'In the last 7 days it would have been raised once, for 5 min. Nothing can be told of 6 d of it: no reading was fresh, or what is usual was not known yet.',
      notes: 1,
      pointSeconds: 840,
      points: 2,
    })
  })

  it('has nothing to say where nothing is kept', async () => {
    const body = { rule: RULE, range: '24h' }
    const tried = rulePreviewSchema.parse(await (await as('viewer', preview, 'POST', { body })).json())
    expect([tried.spans, tried.sentence]).toEqual([
      [],
      'No reading is known of the last 24 hours: there is nothing to try it on yet.',
    ])
  })
})

describe('a maintenance window', () => {
  const body = {
    startsAt: '2040-01-04T22:00:00Z',
    endsAt: '2040-01-04T23:00:00Z',
    repeats: { weekdays: [3], zone: 'Europe/London', until: null },
    label: { key: 'office', value: 'Eelholm' },
    reason: 'New radios',
  }

  it('is planned, listed with its next times, and ended', async () => {
    const made = maintenanceWindowSchema.parse(await (await as('operator', plan, 'POST', { body })).json())
    expect(made).toMatchObject({ state: 'to come', createdBy: 'operator 1', label: body.label })
    expect(made.next.map(({ startsAt }) => startsAt)).toEqual([
      '2040-01-04T22:00:00.000Z',
      '2040-01-11T22:00:00.000Z',
      '2040-01-18T22:00:00.000Z',
    ])
    const { id } = made
    expect(
      maintenanceWindowSchema.parse(await (await as('operator', end, 'DELETE', { id })).json()),
    ).toMatchObject({
      state: 'ended',
      next: [],
    })
    const listed = maintenanceWindowsSchema.parse(await (await as('viewer', windows, 'GET')).json())
    expect(listed.items.map((one) => [one.id, one.state])).toEqual([[id, 'ended']])
  })

  it('is refused to viewers, in the past, backwards, and in no zone', async () => {
    const past = { ...body, repeats: null, startsAt: '2020-01-04T22:00:00Z', endsAt: '2020-01-04T23:00:00Z' }
    const refusals = [
      as('viewer', plan, 'POST', { body }),
      as('operator', plan, 'POST', { body: past }),
      as('operator', plan, 'POST', { body: { ...body, endsAt: body.startsAt } }),
      as('operator', plan, 'POST', { body: { ...body, repeats: { ...body.repeats, zone: 'Eelholm' } } }),
    ]
    expect(await Promise.all((await Promise.all(refusals)).map(problemOf))).toEqual([
      [403, 'forbidden'],
      [400, 'invalid-input'],
      [400, 'invalid-input'],
      [400, 'invalid-input'],
    ])
  })
})
