import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as incidentPdf } from '@/app/(console)/incidents/[number]/report.pdf/route'
import { GET as monthPdf } from '@/app/(console)/overlays/[slug]/report.pdf/route'
import { noteOnIncident } from '@/lib/data/incident-acts'
import { getIncidentReport } from '@/lib/data/incident-report'
import { getMonthReport } from '@/lib/data/month-report'
import { sql } from '@/lib/db'
import { incidentReport } from '@/lib/report/incident-report'
import { monthReport } from '@/lib/report/month-report'
import { printReport } from '@/lib/report/print'
import { ask, problemOf, seedOverlay } from '@/tests/support/collector'
import { seedIncident, seedTold } from '@/tests/support/incidents'
import { pdfText } from '@/tests/support/pdf-text'
import { openTestTeam, type TestTeam } from '@/tests/support/team'

const RAISED = new Date('2026-11-20T01:04:07.000Z')
const CLEARED = new Date('2026-11-20T01:46:00.000Z')
let team: TestTeam
let overlay: { id: string; slug: string }
let incident: { id: string; number: number }
const em = () => team.database.orm.em.fork()
const text = async (report: Parameters<typeof printReport>[0]) =>
  pdfText(await printReport(report, { compress: false }))

beforeAll(async () => {
  team = await openTestTeam()
  overlay = await seedOverlay(team.database, team.teamId, { slug: 'tides' })
  const whose = { overlayId: overlay.id, teamId: team.teamId }
  incident = await seedIncident(em(), { ...whose, raisedAt: RAISED, clearedAt: CLEARED, momentAt: RAISED })
  const { caller } = await team.callAs('operator')
  await seedTold(em(), {
    ...{ incidentId: incident.id, teamId: team.teamId, at: RAISED },
    ...{ userId: 'userId' in caller ? caller.userId : '', address: 'operator@harbourline.example' },
  })
  const call = await team.callAs('operator')
  await noteOnIncident({ ...call, now: CLEARED }, incident.number, 'A loose plug.')
  for (const [hour, level, mean, heard] of [
    ['2026-10-31T23:00Z', 'split', 0.01, 1],
    ['2026-11-01T00:00Z', 'firm', 0.6, 4],
    ['2026-11-01T23:00Z', 'firm', 0.4, 4],
    ['2026-11-20T01:00Z', 'weak', 0.05, 3],
    ['2026-12-01T00:00Z', 'split', 0.01, 1],
  ] as const)
    await sql(
      em(),
      `insert into reading_hours (overlay_id, at, readings, valued, fresh, mean, least, most, level, data, heard, joined,
         crossing_links, demo, fresh_median) values (?, ?, 10, 10, 10, ?, ?, ?, ?, 'fresh', ?, 4, 3, false, ?)`,
      [overlay.id, hour, mean, mean / 2, mean * 2, level, heard, mean],
    )
})
afterAll(() => team.close())

describe('the report of an incident', () => {
  it('has what the timeline has, who was told and how each attempt was answered', async () => {
    const input = await getIncidentReport(await team.callAs('viewer'), incident.number, 'Europe/Berlin')
    const printed = await text(incidentReport(input))
    expect(printed).toContain(
      '2026-11-20 01:04:07\n2026-11-20 02:04:07\nFew links left: 2 links hold the sides',
    )
    expect(printed).toContain('2026-11-20 01:46:00\n2026-11-20 02:46:00\noperator 1 noted: A loose plug.')
    expect(printed.replace(/\s+/g, ' ')).toContain('sent, 1 attempt: 01:04:07 sent: 250 accepted')
    // Nothing is kept of that moment here.
    expect(printed).toContain('No drawing is kept of that moment.')
  })

  it('goes out as a PDF to be saved, to the team only', async () => {
    const get = (number: number, query = '') =>
      ask(incidentPdf, 'GET', { bearer: team.token('viewer'), params: { number: String(number) }, query })
    const response = await get(incident.number)
    expect([
      response.status,
      response.headers.get('content-type'),
      response.headers.get('content-disposition'),
    ]).toEqual([200, 'application/pdf', expect.stringContaining(`incident-${incident.number}.pdf`)])
    expect(
      Buffer.from(await response.arrayBuffer())
        .subarray(0, 5)
        .toString(),
    ).toBe('%PDF-')
    expect(await problemOf(await get(999_999))).toEqual([404, 'not-found'])
    expect(await problemOf(await get(incident.number, '?zone=Nowhere/Else'))).toEqual([400, 'invalid-input'])
  })
})

describe('the report of a month', () => {
  it('sums up its own days and hours and has its incidents', async () => {
    const call = { ...(await team.callAs('viewer')), now: new Date('2026-12-02T08:00:00Z') }
    const input = await getMonthReport(call, overlay.slug, '2026-11')
    expect(input.days).toMatchObject([
      { day: '2026-11-01', hours: 2, fresh: 20, mean: 0.5, least: 0.2, most: 1.2, coverage: 1 },
      { day: '2026-11-20', hours: 1, fresh: 10, mean: 0.05, least: 0.025, most: 0.1, coverage: 0.75 },
    ])
    expect(input.hoursAtLevel).toEqual([
      { level: 'firm', hours: 2 },
      { level: 'weak', hours: 1 },
      { level: 'split', hours: 0 },
      { level: null, hours: 0 },
    ])
    const printed = await text(monthReport(input))
    expect(printed.replace(/\s+/g, ' ')).toContain('November 2026: firm in 67 % of 3 hours read; 1 incident.')
    expect(printed).toContain('Level weak\n1 hour\n')
    // 30 days of 24 hours, of which 3 are kept.
    expect(printed).toContain('Not heard of\n717 hours\n')
    expect(printed).toContain(`${incident.number}\n2026-11-20 01:04:07\n41 min\nFew links left`)
  })

  it('of which nothing is kept says so, and goes out as a PDF', async () => {
    const input = await getMonthReport(await team.callAs('viewer'), overlay.slug, '2025-02')
    expect(await text(monthReport(input))).toContain('February 2025: nothing was read; no incident.')
    const get = (query: string) =>
      ask(monthPdf, 'GET', { bearer: team.token('viewer'), params: { slug: overlay.slug }, query })
    const response = await get('?month=2026-11')
    expect([response.status, response.headers.get('content-type')]).toEqual([200, 'application/pdf'])
    expect(await problemOf(await get('?month=2026-13'))).toEqual([400, 'invalid-input'])
    expect(team.failures).toEqual([])
  })
})
