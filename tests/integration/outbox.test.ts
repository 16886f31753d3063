import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { enqueue } from '@/lib/notify/outbox'
import { PostOffice } from '../support/post-office'

let office: PostOffice
beforeAll(async () => {
  office = await PostOffice.open()
})
afterAll(() => office.close())
beforeEach(() => office.clear())

describe('what is written down to be sent', () => {
  it('is a message for each channel that is on and whose least severity is reached', async () => {
    const mail = await office.channel('email', 'owner@harbourline.example')
    await office.channel('sms', '+12025550111', { leastSeverity: 'urgent' })
    await office.channel('email', 'old@harbourline.example', { isOn: false })
    const body = await office.incident('warning')
    await office.enqueue(body, 'raised')
    expect(
      (await office.rows()).map(({ line, sequence, kind, state }) => ({ line, sequence, kind, state })),
    ).toEqual([{ line: `${body.incident?.id}:${mail}`, sequence: 1, kind: 'raised', state: 'waiting' }])
  })

  it('is nothing for a person who is not in the team', async () => {
    await office.channel('email', 'owner@harbourline.example')
    const [other] = await sql<{ id: string }>(
      office.em(),
      `insert into teams (slug, name, created_at) values ('pilots', 'Pilots', now()) on conflict (slug) do update set name = 'Pilots' returning id`,
    )
    const body = await office.incident('urgent')
    const to = { userId: office.person.userId }
    const message = { kind: 'raised' as const, body, incidentId: null, teamId: other!.id, to }
    await office.em().transactional((tx) => enqueue(tx, [message], office.now()))
    expect(await office.rows()).toEqual([])
  })

  it('is numbered without gaps or doubles, however many write at once and one takes it back', async () => {
    await office.channel('email', 'owner@harbourline.example')
    await office.channel('email', 'second@harbourline.example')
    const body = await office.incident()
    const failing = office.em().transactional(async (tx) => {
      const to = { userId: office.person.userId }
      await enqueue(
        tx,
        [{ kind: 'graver', body, incidentId: body.incident!.id, teamId: office.team.teamId, to }],
        office.now(),
      )
      throw new Error('taken back')
    })
    const outcomes = await Promise.allSettled([
      failing,
      ...Array.from({ length: 12 }, () => office.enqueue(body, 'raised')),
    ])
    expect(outcomes.filter(({ status }) => status === 'rejected')).toHaveLength(1)
    const rows = await office.rows()
    for (const line of new Set(rows.map((row) => row.line)))
      expect(rows.filter((row) => row.line === line).map(({ sequence }) => sequence)).toEqual(
        Array.from({ length: 12 }, (_, index) => index + 1),
      )
  })
})

describe('quiet hours', () => {
  const quiet = { from: '22:00', to: '07:00', zone: 'UTC' }

  it('put off to their end what is not urgent', async () => {
    await office.channel('email', 'owner@harbourline.example', { quiet })
    await office.enqueue(await office.incident('warning'), 'raised')
    expect((await office.rows()).map(({ due_at }) => due_at)).toEqual(['2026-12-02T07:00:00Z'])
  })

  it('do not hold back what is urgent, nor what waits before it in the line', async () => {
    await office.channel('email', 'owner@harbourline.example', { quiet })
    const body = await office.incident('warning')
    await office.enqueue(body, 'raised')
    await office.enqueue({ ...body, incident: { ...body.incident!, severity: 'urgent' } }, 'graver')
    expect((await office.rows()).map(({ kind, due_at }) => [kind, due_at])).toEqual([
      ['raised', '2026-12-02T04:00:00Z'],
      ['graver', '2026-12-02T04:00:00Z'],
    ])
  })
})
