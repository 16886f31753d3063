import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import {
  changeRule,
  createInvitation,
  endPartnership,
  getOverlay,
  joinAsPartner,
  listOverlays,
  listPartners,
  listRules,
} from '@/lib/data'
import { eventSchema, readingSchema } from '@/lib/data/dto'
import { listEvents } from '@/lib/data/events'
import { getIncident } from '@/lib/data/incidents'
import { partnersSchema } from '@/lib/data/partner-dto'
import { getReading } from '@/lib/data/readings'
import { sql } from '@/lib/db'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import {
  openSharedOverlay,
  PRIVATE,
  type SharedOverlay,
  stored,
  type TeamName,
} from '@/tests/support/shared-overlay'

import { tried } from '@/tests/support/tried'

let shared: SharedOverlay
beforeAll(async () => {
  shared = await openSharedOverlay()
})
afterAll(() => shared.close())

const slug = 'tides'
const em = () => shared.database.orm.em.fork()

describe('an invitation', () => {
  const invite = async () =>
    createInvitation(shared.callAs('harbourline', 'owner'), slug, { expiresInHours: 1 })
  const join = async (code: string, team: TeamName = 'eelholm') =>
    tried(shared.callAs(team, 'owner'), (call) => joinAsPartner(call, { code, contact: null }))

  it('is kept as a fingerprint only, and opens the overlay to one team', async () => {
    const { code, hint } = await invite()
    const rows = JSON.stringify(await sql(em(), 'select * from overlay_partners'))
    expect([rows.includes(code), rows.includes(hint)]).toEqual([false, true])
    expect((await join(code.toLowerCase().replaceAll('-', ' '))).value).toEqual({ slug, name: slug })
    expect((await join(code, 'harbourline')).refused).toBe('already-partner')
    expect((await join(code, 'skerry')).refused).toBe('already-partner')
    expect((await join('NOSUCH-CODE')).refused).toBe('invitation-refused')
  })

  it('is refused once used, expired or withdrawn, and to those who do not own a team', async () => {
    const expired = await invite()
    await sql(em(), `update overlay_partners set expires_at = now() - interval '1 s' where hint = ?`, [
      expired.hint,
    ])
    expect((await join(expired.code)).refused).toBe('invitation-refused')
    const used = await sql<{ hint: string }>(
      em(),
      `select hint from overlay_partners where state = 'accepted'`,
    )
    const { invitations } = partnersSchema.parse(
      await listPartners(shared.callAs('harbourline', 'owner'), slug),
    )
    expect(
      invitations
        ?.filter(({ state }) => state === 'used')
        .map(({ hint }) => hint)
        .sort(),
    ).toEqual(used.map(({ hint }) => hint).sort())
    const fresh = await invite()
    const operator = shared.callAs('eelholm', 'operator')
    expect(
      await tried(operator, (call) =>
        joinAsPartner(call, { code: fresh.code, team: 'eelholm', contact: null }),
      ),
    ).toEqual({
      refused: 'forbidden',
    })
  })
})

describe('each team', () => {
  it('is warned by rules of its own, and changes no other team’s', async () => {
    const rulesOf = async (team: TeamName) => (await listRules(shared.callAs(team, 'operator'), slug)).items
    const skerry = await rulesOf('skerry')
    const pinnet = await rulesOf('pinnet')
    expect(skerry.length).toBe(DEFAULT_RULES.length + 1)
    expect(skerry.filter(({ id }) => pinnet.some((other) => other.id === id))).toEqual([])
    const other = await tried(shared.callAs('skerry', 'operator'), (call) =>
      changeRule(call, slug, pinnet[0]!.id, { isOn: false }),
    )
    expect(other.refused).toBe('not-found')
  })

  it('has incidents that no other team opens', async () => {
    for (const team of ['harbourline', 'skerry', 'pinnet'] as const)
      for (const reader of ['harbourline', 'skerry', 'pinnet', 'eelholm'] as const) {
        const read = await tried(shared.callAs(reader, 'owner'), (call) =>
          getIncident(call, shared.incidents[team]),
        )
        expect(read.refused, `${reader} reads of ${team}`).toBe(reader === team ? undefined : 'not-found')
      }
  })

  it('sees the others’ contacts and how many of their agents are heard', async () => {
    const { teams, invitations, may } = partnersSchema.parse(
      await listPartners(shared.callAs('skerry', 'owner'), slug),
    )
    expect(
      teams.map(({ team, standing, yours, contact, joined, heard }) => [
        team.slug,
        standing,
        yours,
        contact,
        joined,
        heard,
      ]),
    ).toEqual([
      ['harbourline', 'owner', false, 'Harbourline desk', 2, 2],
      ['skerry', 'partner', true, 'skerry desk', 1, 1],
      ['pinnet', 'partner', false, 'pinnet desk', 1, 1],
    ])
    expect([invitations, may]).toEqual([null, { invite: false, change: true, end: true }])
    const overlay = await getOverlay(shared.callAs('skerry', 'viewer'), slug)
    expect(overlay).toMatchObject({
      ...{ standing: 'partner', role: 'viewer', runbookUrl: null, shared: true, contact: 'Harbourline desk' },
      as: { slug: 'skerry', name: 'Skerry' },
      team: { slug: 'harbourline' },
    })
  })
})

describe('the end of a partnership', () => {
  it('takes the team’s agents, codes, rules and windows with it, and leaves what was recorded', async () => {
    const before = shared.callAs('skerry', 'owner')
    const ended = await stored(before, (call) => endPartnership(call, slug, 'skerry'))
    expect(ended).toEqual({ team: { slug: 'skerry', name: 'Skerry' }, agents: 2 })
    const states = await sql<{ name: string; state: string }>(
      em(),
      `select name, state from agents where overlay_id = ? order by name`,
      [shared.overlay.id],
    )
    expect(states.map(({ name, state }) => `${name} ${state}`)).toEqual([
      ...['pin-01 joined', 'ske-01 left', 'ske-02 left', 'ske-03 left', 'tar-01 joined', 'tar-02 joined'],
    ])
    const of = [shared.overlay.id, shared.teamIds.skerry]
    const [left] = await sql(
      em(),
      `select (select count(*)::int from warning_rules where overlay_id = ? and team_id = ?) as rules,
         (select count(*)::int from joining_codes where overlay_id = ? and team_id = ? and revoked_at is null) as codes,
         (select count(*)::int from incidents where overlay_id = ? and team_id = ? and resolved_at is null) as incidents,
         (select count(*)::int from agent_sessions s join agents a on a.id = s.agent_id where a.overlay_id = ? and a.team_id = ?) as sessions`,
      [...of, ...of, ...of, ...of],
    )
    expect(left).toEqual({ rules: 0, codes: 0, incidents: 0, sessions: 0 })
    expect((await tried(shared.callAs('skerry', 'owner'), (call) => getReading(call, slug))).refused).toBe(
      'not-found',
    )
    expect((await listOverlays(shared.callAs('skerry', 'viewer'))).map((one) => one.slug)).toEqual([])
    const incident = await getIncident(shared.callAs('skerry', 'viewer'), shared.incidents.skerry)
    expect(incident.state).toBe('resolved')
    expect(JSON.stringify(incident)).not.toContain('tar-01')
    const events = (await listEvents(shared.callAs('pinnet', 'viewer'), slug)).map((one) =>
      eventSchema.parse(one),
    )
    expect(events.map(({ text }) => text)).toContain('Skerry no longer shares the overlay')
    expect(events.find(({ kind }) => kind === 'agent-left')?.text).toMatch(
      /^partner node \w{4} and partner node \w{4} left: Skerry no longer shares the overlay$/,
    )
  })

  it('stands in the audit logs of both teams, in the other’s without the person', async () => {
    const entries = await sql<{ team: string; action: string; actor: string }>(
      em(),
      `select t.slug as team, action, actor from audit_entries a join teams t on t.id = a.team_id
       where action in ('partner.join', 'partner.end') order by a.id`,
    )
    // Without the wrappers only what stands in the other team's log is entered.
    expect(entries).toEqual([
      { team: 'harbourline', action: 'partner.join', actor: 'team Skerry' },
      { team: 'harbourline', action: 'partner.join', actor: 'team Pinnet' },
      { team: 'harbourline', action: 'partner.end', actor: 'team Skerry' },
    ])
  })

  it('leaves nothing to a reading of before that the other teams may not see', async () => {
    const reading = readingSchema.parse(
      await getReading(shared.callAs('pinnet', 'viewer'), slug, { at: shared.at.toISOString() }),
    )
    expect(PRIVATE.skerry.filter((word) => JSON.stringify(reading).includes(word))).toEqual([])
  })
})
