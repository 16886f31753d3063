import { describe, expect, it } from 'vitest'
import { query } from '@/lib/collector/query'
import { listKeptMoments } from '@/lib/data/kept-moments'
import { getLinkStory } from '@/lib/data/link-story'
import { getNodeStory } from '@/lib/data/node-story'
import { momentsSchema, weakPlaceSchema } from '@/lib/data/weak-dto'
import { getWeakPlace } from '@/lib/data/weak-place'
import { iso, LINKS, MINUTE_MS, NAMES, weakOverlayPerTest } from '@/tests/support/weak-overlay'

const overlay = weakOverlayPerTest()
const { seeded, em, readingNow, storeReading, storeMemory, report, keep, said, weakNow } = overlay
const last = { last: '3h' as const }
const look = async (at?: string) =>
  weakPlaceSchema.parse(
    await getWeakPlace(await seeded.team.callAs('viewer'), seeded.overlay.slug, { ...last, at }),
  )

describe('the weak place', () => {
  it('has its sides, what follows from their sizes, the labels it follows, and each crossing link with its bound, age and course', async () => {
    await weakNow()
    await keep(20)
    await keep(10)
    await said('link-lost', 40, ['eel-07', 'tar-01'], ['eel-08', 'tar-02'])
    await said('link-found', 15, ['eel-07', 'tar-01'])
    const weak = await look()
    expect(weak).toMatchObject({
      isNow: true,
      disclosure: 'named',
      reading: { lambda2: 0.3, level: 'weak' },
      withheld: null,
      remark: null,
      // Of the triangles six link ends a side, and the weights across.
      sides: [
        { name: 'a', nodes: 3, volume: 7.25 },
        { name: 'b', nodes: 3, volume: 7.25 },
      ],
      crossing: { links: 2, weight: 1.25 },
      figures: { conductance: 1.25 / 7.25, least: 0.14 },
      runnerUp: null,
    })
    expect(weak.figures!.expansion).toBeCloseTo(1.25 / 3, 12)
    expect(weak.figures!.lambda2AtMost).toBeCloseTo((6 * 1.25) / 9, 12)
    // The largest weighted degree is that of tar-01, 2.75.
    expect(weak.figures!.most).toBeCloseTo(Math.sqrt(2 * 2.75 * 0.32), 12)
    const [first, second] = weak.links
    expect(first).toMatchObject({ a: 'eel-07', b: 'tar-01', weight: 0.75, share: 0.6, state: 'live' })
    expect(first!.since).toEqual({ at: iso(overlay.now - 15 * MINUTE_MS), atLeast: false })
    expect(first!.without).toBeCloseTo(0.3 * 0.4, 12)
    expect(first!.course).toEqual([
      [overlay.now - 20 * MINUTE_MS, 0.95, 0.6],
      [overlay.now - 10 * MINUTE_MS, 0.85, 0.6],
    ])
    // It was lost and nobody said that it was found: it has been there since a snapshot shows it.
    expect(second!.since).toEqual({ at: iso(overlay.now - 20 * MINUTE_MS), atLeast: true })
    expect(weak.follows).toMatchObject({
      nodes: 6,
      labels: [
        { key: 'office', labelled: 6, exactly: { a: ['Tarnwick'], b: ['Eelholm'] } },
        { key: 'mains', labelled: 5, unlabelled: 1, exactly: null },
      ],
      leftOut: [{ key: 'host', because: 'nearly-unique' }],
    })
    expect(weak.follows.labels[0]!.adjusted).toBeCloseTo(1, 9)
    // Two of the twenty ways to deal three of six: a tenth.
    expect(Math.abs(weak.follows.labels[0]!.p - 0.1)).toBeLessThan(0.04)
    expect((await look()).follows).toEqual(weak.follows)
  })

  it('of a past moment is as it was, with courses up to then', async () => {
    await weakNow()
    await keep(20)
    await keep(10, {
      reading: readingNow({ sides: null, singleCut: false, crossingLinks: null, crossingWeight: null }),
    })
    const then = await look(iso(overlay.now - 19 * MINUTE_MS))
    expect(then).toMatchObject({
      isNow: false,
      at: iso(overlay.now - 20 * MINUTE_MS),
      reading: { lambda2: 0.5 },
    })
    expect(then.links[0]).toMatchObject({ a: 'eel-07', b: 'tar-01', weight: 0.95 })
    expect(then.links[0]!.course).toHaveLength(1)
    expect(then.links[0]!.without).toBeCloseTo(0.5 * 0.4, 12)
    const shared = await look(iso(overlay.now - 9 * MINUTE_MS))
    expect(shared).toMatchObject({ sides: null, figures: null, links: [], withheld: { because: 'shared' } })
    await expect(look(iso(overlay.now - 300 * MINUTE_MS))).rejects.toMatchObject({ code: 'not-found' })
  })

  it('gives no bound for a link whose far end is unheard, and zero for the last one', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, LINKS, name === 'eel-07' ? 3_600 : 0)
    await storeReading()
    expect((await look()).links.map(({ without }) => without)).toEqual([null, expect.closeTo(0.3 * 0.72, 12)])
    await query(em(), 'delete from readings where overlay_id = ?', [seeded.overlay.id])
    await storeReading({ crossingLinks: 1 })
    expect((await look()).links[1]!.without).toBe(0)
  })

  it('tells sizes and no links where agents name none, and of the runner-up what was counted', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading({ runnerUp: { sides: [1, 5], links: 3, weight: 3 }, level: 'firm' })
    await query(em(), `update overlays set disclosure = 'sealed' where id = ?`, [seeded.overlay.id])
    expect(await look()).toMatchObject({
      disclosure: 'sealed',
      links: [],
      crossing: { links: 2 },
      runnerUp: { sides: [1, 5], links: 3, weight: 3, expansion: 3 },
      remark: expect.stringContaining('firm'),
    })
  })

  it.each([
    [
      'is not there before anyone has joined',
      'nothing-joined',
      { coverage: { linksKnown: 0, linksMeasured: 0, joined: 0, heard: 0, unheard: 0 } },
    ],
    ['is not there before a cut is counted', 'not-counted', {}],
    ['is not there while too few are heard', 'unheard', { data: 'unheard' as const, lambda2: null }],
    ['is not there where several cuts are as weak', 'shared', { singleCut: false }],
  ])('%s, and says what to do', async (_, because, over) => {
    await storeMemory({ cut: null })
    const none = { sides: null, crossingLinks: null, crossingWeight: null }
    await keep(1, { reading: readingNow({ ...none, ...over }) })
    const { withheld, sides } = await look(iso(overlay.now))
    expect(sides).toBeNull()
    expect(withheld).toMatchObject({ because, next: expect.stringMatching(/\.$/) })
  })

  it('is not there for another team', async () => {
    const call = await seeded.team.callAs('viewer')
    const stranger = { ...call, caller: { ...call.caller, teams: [] } } as typeof call
    for (const ask of [
      () => getWeakPlace(stranger, seeded.overlay.slug, last),
      () => listKeptMoments(stranger, seeded.overlay.slug, last),
      () => getNodeStory(stranger, seeded.overlay.slug, 'tar-01', last),
      () => getLinkStory(stranger, seeded.overlay.slug, { a: 'eel-07', b: 'tar-01' }, last),
    ])
      await expect(ask()).rejects.toMatchObject({ code: 'not-found' })
  })
})

it('moments that are kept are listed, the oldest first', async () => {
  await keep(20)
  await keep(10)
  await keep(200)
  const call = await seeded.team.callAs('viewer')
  const { items } = momentsSchema.parse(await listKeptMoments(call, seeded.overlay.slug, last))
  expect(items).toEqual([
    { at: iso(overlay.now - 20 * MINUTE_MS), lambda2: 0.5, level: 'weak', crossingLinks: 2 },
    { at: iso(overlay.now - 10 * MINUTE_MS), lambda2: 0.4, level: 'weak', crossingLinks: 2 },
  ])
  const day = await listKeptMoments(call, seeded.overlay.slug, { last: '24h' })
  // The two later ones may share a step.
  expect([day.items[0]?.at, day.items.at(-1)?.at]).toEqual([
    iso(overlay.now - 200 * MINUTE_MS),
    iso(overlay.now - 10 * MINUTE_MS),
  ])
})
