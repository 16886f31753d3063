import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as fileRoute } from '@/app/(console)/incidents/[number]/files/[id]/route'
import { POST as attachRoute } from '@/app/api/v1/incidents/[number]/files/route'
import { AuditEntrySchema, IncidentFileSchema } from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { FILE_MOST_BYTES } from '@/lib/data/incident-dto'
import { getIncident } from '@/lib/data/incidents'
import { incidentFileSchema } from '@/lib/data/warn-dto'
import { sql } from '@/lib/db'
import { ask, problemOf, seedOverlay } from '@/tests/support/collector'
import { seedIncident } from '@/tests/support/incidents'
import { openTestTeam, type TestTeam } from '@/tests/support/team'

let team: TestTeam
let number: number
let incidentId: string
const em = () => team.database.orm.em.fork()

beforeAll(async () => {
  team = await openTestTeam()
  const { id: overlayId } = await seedOverlay(team.database, team.teamId, { slug: 'tides' })
  const seeded = await seedIncident(em(), { overlayId, teamId: team.teamId, raisedAt: new Date() })
  number = seeded.number
  incidentId = seeded.id
})
afterAll(() => team.close())

const attach = (role: Role, name: string, body: string | Uint8Array<ArrayBuffer>) =>
  attachRoute(
    new Request(`http://thinspan.test/api?name=${encodeURIComponent(name)}`, {
      method: 'POST',
      headers: { authorization: `Bearer ${team.token(role)}`, 'content-type': 'application/octet-stream' },
      body,
    }),
    { params: Promise.resolve({ number: String(number) }) },
  )
const read = (id: string, at = number) =>
  ask(fileRoute, 'GET', { bearer: team.token('viewer'), params: { number: String(at), id } })

describe('a file of an incident', () => {
  it('is kept with its size and who attached it, entered, audited, and comes back byte for byte', async () => {
    const response = await attach('operator', 'links.csv', 'source,target\ntar-01,gul-04\n')
    expect(response.status).toBe(201)
    const file = incidentFileSchema.parse(await response.json())
    expect(file).toMatchObject({
      name: 'links.csv',
      mediaType: 'text/csv',
      size: 28,
      by: { name: 'operator 1' },
    })
    const whole = await getIncident(await team.callAs('viewer'), number)
    expect(whole.files).toEqual([file])
    expect(whole.entries.at(-1)).toMatchObject({ kind: 'file', text: 'operator 1 attached links.csv' })
    const entry = await em().findOneOrFail(AuditEntrySchema, { action: 'incident.file', outcome: 'ok' })
    expect(entry).toMatchObject({
      subject: `tides: incident ${number}`,
      data: { file: 'links.csv', bytes: 28 },
      teamId: team.teamId,
    })
    const back = await read(file.id)
    expect(await back.text()).toBe('source,target\ntar-01,gul-04\n')
    expect(back.headers.get('content-disposition')).toMatch(/^attachment; /)
  })

  it('is refused by what it is, by its size, and from whoever may not; then nothing is kept', async () => {
    const before = await em().count(IncidentFileSchema)
    expect(await problemOf(await attach('operator', 'chart.png', '<html></html>'))).toEqual([
      415,
      'wrong-file',
    ])
    expect(await problemOf(await attach('operator', 'nothing.txt', ''))).toEqual([415, 'wrong-file'])
    const large = new Uint8Array(FILE_MOST_BYTES + 1).fill(0x61)
    expect(await problemOf(await attach('operator', 'large.txt', large))).toEqual([413, 'too-large'])
    expect(await problemOf(await attach('viewer', 'links.csv', 'a,b'))).toEqual([403, 'forbidden'])
    expect(await problemOf(await attach('operator', '', 'a'))).toEqual([400, 'invalid-input'])
    expect(await em().count(IncidentFileSchema)).toBe(before)
    expect(team.failures).toEqual([])
  })

  it('is refused when all of them together would be over 25 MB', async () => {
    await sql(
      em(),
      `insert into incident_files (incident_id, name, media_type, bytes, size, sha256, at)
       values (?, 'x.txt', 'text/plain', '', ?, '', now())`,
      [incidentId, 25 * 1024 * 1024 - 100],
    )
    expect((await attach('operator', 'small.txt', 'a'.repeat(72))).status).toBe(201)
    const over = await attach('operator', 'small.txt', 'a')
    expect([over.status, (await over.json()).detail]).toEqual([
      413,
      expect.stringContaining('25 MB together'),
    ])
  })

  it('is found under its own incident only', async () => {
    const { id } = await em().findOneOrFail(IncidentFileSchema, { name: 'links.csv' })
    for (const wrong of [await read(id, number + 1), await read('made-up'), await read(incidentId)])
      expect(await problemOf(wrong)).toEqual([404, 'not-found'])
  })
})
