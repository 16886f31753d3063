import { describe, expect, it } from 'vitest'
import { loadOverlay } from '@/lib/collector/leader-load'
import { BLANK_MEMORY } from '@/lib/collector/memory'
import type { Moment } from '@/lib/collector/moment'
import { keepMoment, Moments } from '@/lib/collector/moments'
import { overlayChannel } from '@/lib/collector/notices'
import { getCut } from '@/lib/data/cut'
import { cutSchema, nodesSchema, type Reading, readingSchema } from '@/lib/data/dto'
import { listNodes } from '@/lib/data/nodes'
import { getReading } from '@/lib/data/readings'
import { Listener, sql } from '@/lib/db'
import { forgetNodes, thinSnapshots } from '@/lib/jobs'
import { deliver, joinAgent, seedCode, seedOverlay } from '@/tests/support/collector'
import { startTestLeader } from '@/tests/support/leaders'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { someReport } from '@/tests/support/reports'
import { within } from '@/tests/support/until'

const seeded = overlayPerTest({ pace: 'steady' })
const { em } = seeded
const rows = (text: string, params: unknown[] = []) => sql(em(), text, params)
const id = (n: number) => `00000000-0000-4000-8000-0000000000${String(n).padStart(2, '0')}`
const page = { limit: 100 }
const MINUTE_MS = 60_000
const START = Date.parse('2026-11-20T10:00:07.000Z')

const readingAt = (atMs: number, over: Partial<Reading> = {}): Reading => ({
  at: new Date(atMs).toISOString(),
  lambda2: 0.06,
  low: 0.05,
  high: 0.07,
  confidence: 0.9,
  core: null,
  lambda3AtMost: 1,
  crossCheck: 0.06,
  level: 'weak',
  trend: 'falling',
  data: 'fresh',
  verdict: 'Weak.',
  detail: 'One link holds.',
  treatAsSplit: false,
  singleCut: true,
  usual: 0.6,
  sides: [
    { name: 'a', nodes: 2 },
    { name: 'b', nodes: 1 },
  ],
  crossingLinks: 1,
  crossingWeight: 0.5,
  looseEnds: [],
  coverage: { linksKnown: 3, linksMeasured: 3, joined: 3, heard: 2, unheard: 1 },
  seedings: [1],
  last: null,
  demo: false,
  ...over,
})
const momentAt = (atMs: number, over: Partial<Moment> = {}): Moment => ({
  atMs,
  nodes: [
    {
      ...{ agentId: id(1), name: 'tar-01', labels: { office: 'Tarnwick' }, state: 'heard', side: 'a' },
      ...figures(0.75),
    },
    {
      ...{ agentId: id(2), name: 'gul-04', labels: { office: 'Gullhythe' }, state: 'unheard', side: 'a' },
      ...figures(null),
    },
    {
      ...{ agentId: id(3), name: 'pin-02', labels: { office: 'Pinnet Bay' }, state: 'detached', side: 'b' },
      ...figures(-1.5),
    },
  ],
  links: [{ a: id(3), b: id(1), weight: 0.5, share: 0.9, lost: false }],
  reading: readingAt(atMs),
  ...over,
})
const figures = (value: number | null) => ({ value, degree: 2, weightedDegree: 1.5 })
const keep = (moment: Moment) => em().transactional((tx) => keepMoment(tx, seeded.overlay.id, moment))
const iso = (ms: number) => new Date(ms).toISOString()

describe('a past moment', () => {
  it('is shown as it was: reading, cut with its crossing links, and nodes with sides, values and states', async () => {
    await keep(momentAt(START))
    // Since then one has been renamed, one is gone, and the cut is another.
    await rows('update snapshot_nodes set current = false where overlay_id = ?', [seeded.overlay.id])
    await keep(momentAt(START + MINUTE_MS, { nodes: [], links: [] }))
    const call = await seeded.team.callAs('viewer')
    const at = iso(START + 40_000)
    const nodes = nodesSchema.parse(await listNodes(call, seeded.overlay.slug, { ...page, at }))
    const common = { degree: 2, weightedDegree: 1.5, version: null }
    expect(nodes).toEqual({
      items: [
        {
          ...common,
          name: 'gul-04',
          labels: { office: 'Gullhythe' },
          side: 'a',
          value: null,
          state: 'unheard',
          heardAt: null,
        },
        {
          ...common,
          name: 'pin-02',
          labels: { office: 'Pinnet Bay' },
          side: 'b',
          value: -1.5,
          state: 'detached',
          heardAt: iso(START),
        },
        {
          ...common,
          name: 'tar-01',
          labels: { office: 'Tarnwick' },
          side: 'a',
          value: 0.75,
          state: 'heard',
          heardAt: iso(START),
        },
      ],
      next: null,
      at: iso(START),
    })
    const cut = cutSchema.parse(await getCut(call, seeded.overlay.slug, { at }))
    expect(cut).toEqual({
      at: iso(START),
      sides: readingAt(START).sides,
      withheld: null,
      crossingLinks: 1,
      crossingWeight: 0.5,
      links: [
        {
          a: 'pin-02',
          b: 'tar-01',
          weight: 0.5,
          share: 0.9,
          crossing: true,
          state: 'live',
          heardAt: iso(START),
        },
      ],
      // As many values as nodes: that says nothing.
      follows: null,
    })
    expect(readingSchema.parse(await getReading(call, seeded.overlay.slug, { at }))).toEqual(readingAt(START))
  })

  it('has pages and labels as the present has', async () => {
    await keep(momentAt(START))
    const call = await seeded.team.callAs('viewer')
    const ask = (over: object) => listNodes(call, seeded.overlay.slug, { limit: 2, at: iso(START), ...over })
    const first = await ask({})
    expect([first.items.map(({ name }) => name), first.next]).toEqual([['gul-04', 'pin-02'], 'pin-02'])
    expect((await ask({ after: 'pin-02' })).items.map(({ name }) => name)).toEqual(['tar-01'])
    expect((await ask({ label: 'office=Tarnwick' })).items.map(({ name }) => name)).toEqual(['tar-01'])
  })

  it('of which nothing is kept is said to be so, and one of another team is not there', async () => {
    await keep(momentAt(START))
    const call = await seeded.team.callAs('viewer')
    for (const at of [iso(START - 1), iso(START + 6 * MINUTE_MS)])
      for (const ask of [getCut, getReading])
        await expect(ask(call, seeded.overlay.slug, { at })).rejects.toMatchObject({
          code: 'not-found',
          detail: expect.stringContaining('Choose another'),
        })
    const stranger = { ...call, caller: { ...call.caller, teams: [] } } as typeof call
    await expect(getCut(stranger, seeded.overlay.slug, { at: iso(START) })).rejects.toMatchObject({
      code: 'not-found',
    })
  })

  it('is kept once a minute, and nodes keep their numbers until their labels change', async () => {
    await keep(momentAt(START))
    await keep(momentAt(START + 20_000))
    const [tar, ...others] = momentAt(START).nodes
    const moved = { ...tar!, labels: { office: 'Eelholm' } }
    await keep(momentAt(START + MINUTE_MS, { nodes: [...others, moved] }))
    expect(
      await rows('select nodes::text from node_snapshots where overlay_id = ? order by at', [
        seeded.overlay.id,
      ]),
    ).toEqual([{ nodes: '{[1,4)}' }, { nodes: '{[1,3),[4,5)}' }])
    const call = await seeded.team.callAs('viewer')
    const labelsAt = async (atMs: number) =>
      (await listNodes(call, seeded.overlay.slug, { ...page, at: iso(atMs) })).items.at(-1)?.labels
    expect([await labelsAt(START), await labelsAt(START + MINUTE_MS)]).toEqual([
      { office: 'Tarnwick' },
      { office: 'Eelholm' },
    ])
  })

  it('is kept by the hour for longer: the first of each, and who is in none any more is forgotten', async () => {
    await rows('delete from roll_ups')
    for (let minute = 0; minute < 130; minute += 10) await keep(momentAt(START + minute * MINUTE_MS))
    const now = START + 150 * MINUTE_MS
    await thinSnapshots(em(), now)
    await thinSnapshots(em(), now + 60 * MINUTE_MS)
    await thinSnapshots(em(), now)
    await rows('delete from node_snapshots where overlay_id = ?', [seeded.overlay.id])
    const kept = await rows(
      `select to_char(at at time zone 'UTC', 'HH24:MI') as at from node_snapshot_hours where overlay_id = ? order by 1`,
      [seeded.overlay.id],
    )
    expect(kept).toEqual([{ at: '10:00' }, { at: '11:00' }, { at: '12:00' }])
    const call = await seeded.team.callAs('viewer')
    const then = await listNodes(call, seeded.overlay.slug, { ...page, at: iso(START + 119 * MINUTE_MS) })
    expect([then.at, then.items.length]).toEqual([iso(START + 60 * MINUTE_MS), 3])

    const nodes = () => rows('select current from snapshot_nodes where overlay_id = ?', [seeded.overlay.id])
    await forgetNodes(em(), new Date(now))
    expect(await nodes()).toEqual([{ current: false }, { current: false }, { current: false }])
    await forgetNodes(em(), new Date(now + 396 * 24 * 60 * MINUTE_MS))
    expect(await nodes()).toHaveLength(3)
    await forgetNodes(em(), new Date(now + 398 * 24 * 60 * MINUTE_MS))
    expect(await nodes()).toEqual([])
  })
})

it('whoever leads an overlay keeps its moments, and one who has been replaced keeps none', async () => {
  const { id: overlayId, slug } = await seedOverlay(seeded.team.database, seeded.team.teamId, { slug: 'led' })
  const member = await joinAgent(await seedCode(seeded.team.database, overlayId), 'tar-01', {
    office: 'Tarnwick',
  })
  await deliver(member, someReport(1))
  const listener = new Listener({ random: Math.random, warn: () => {} }, { url: seeded.team.database.url })
  let rounds = 0
  // With the second round the first is over, and what came after it.
  const twoRounds = new Promise<void>((resolve) => {
    void listener.subscribe(
      overlayChannel(overlayId),
      (payload) => {
        rounds += payload === null ? 0 : 1
        if (rounds === 2) resolve()
      },
      new AbortController().signal,
    )
  })
  listener.start()
  const leader = startTestLeader(seeded.team.database, 1)
  await within('two rounds', twoRounds)
  await leader.stop()
  await listener.stop()
  const snapshots = () => rows('select at from node_snapshots where overlay_id = ?', [overlayId])
  // One, or two where a new minute has begun.
  const minutes = (await snapshots()).map(({ at }) => Math.floor(new Date(String(at)).getTime() / MINUTE_MS))
  expect(minutes.length).toBeGreaterThan(0)
  expect(new Set(minutes).size).toBe(minutes.length)
  const call = await seeded.team.callAs('viewer')
  const { items } = await listNodes(call, slug, { ...page, at: new Date().toISOString() })
  expect(items).toMatchObject([{ name: 'tar-01', labels: { office: 'Tarnwick' }, side: null }])
  expect(leader.failures).toEqual([])

  await rows('delete from node_snapshots where overlay_id = ?', [overlayId])
  const loaded = (await loadOverlay(em(), overlayId))!
  const look = (holder: string) =>
    new Moments({ forkEm: async () => em() }, { overlayId, holder }).look(
      loaded,
      BLANK_MEMORY,
      readingAt(START),
    )
  await look('someone replaced')
  expect(await snapshots()).toEqual([])
  const [control] = await rows('select holder from controls where overlay_id = ?', [overlayId])
  await look(String(control?.holder))
  expect(await snapshots()).toHaveLength(1)
})
