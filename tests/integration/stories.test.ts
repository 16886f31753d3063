import { describe, expect, it } from 'vitest'
import { getLinkStory } from '@/lib/data/link-story'
import { getNodeStory } from '@/lib/data/node-story'
import { linkStorySchema, nodeStorySchema } from '@/lib/data/weak-dto'
import { seedIncident } from '@/tests/support/incidents'
import { iso, MINUTE_MS, NAMES, weakOverlayPerTest } from '@/tests/support/weak-overlay'

const overlay = weakOverlayPerTest()
const { seeded, em, storeReading, storeMemory, report, momentNode, keep, said, weakNow } = overlay
const last = { last: '3h' as const }

describe('a node', () => {
  it('has its course, its neighbours as named, and the incidents that name it', async () => {
    await weakNow()
    await keep(20)
    await keep(10, { nodes: NAMES.filter((name) => name !== 'tar-02').map(momentNode), links: [] })
    const raisedAt = new Date(overlay.now - 5 * MINUTE_MS)
    const where = { overlayId: seeded.overlay.id, teamId: seeded.team.teamId, raisedAt }
    const { number } = await seedIncident(em(), {
      ...where,
      sentence: 'tar-03 unheard.',
      resolvedAt: raisedAt,
    })
    await seedIncident(em(), { ...where, sentence: 'tar-030 unheard.' })
    const call = await seeded.team.callAs('viewer')
    const story = nodeStorySchema.parse(await getNodeStory(call, seeded.overlay.slug, 'tar-03', last))
    expect(story).toMatchObject({
      node: { name: 'tar-03', side: 'a', state: 'heard', degree: 2 },
      disclosure: 'named',
      links: [
        { a: 'tar-01', b: 'tar-03', crossing: false },
        { a: 'tar-02', b: 'tar-03', crossing: false },
      ],
      unnamed: 0,
      course: [
        {
          at: iso(overlay.now - 20 * MINUTE_MS),
          value: 0.5,
          side: 'a',
          degree: 3,
          weightedDegree: 2.5,
          state: 'heard',
        },
        {
          at: iso(overlay.now - 10 * MINUTE_MS),
          value: 0.25,
          side: 'a',
          degree: 3,
          weightedDegree: 2.25,
          state: 'heard',
        },
      ],
      incidents: [{ number, lines: [{ at: raisedAt.toISOString(), text: 'tar-03 unheard.' }] }],
    })
    expect(story.incidents).toHaveLength(1)
    await expect(getNodeStory(call, seeded.overlay.slug, 'pin-02', last)).rejects.toMatchObject({
      code: 'not-found',
      detail: expect.stringContaining('pin-02'),
    })
  })

  it('whose links are not named has them counted', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading()
    const call = await seeded.team.callAs('viewer')
    expect(await getNodeStory(call, seeded.overlay.slug, 'tar-01', last)).toMatchObject({
      links: [],
      unnamed: 3,
    })
  })
})

describe('a link', () => {
  it('is found by its ends in either order, with its course, when it came and went, and its incidents', async () => {
    await weakNow()
    await keep(10)
    await said('link-lost', 40, ['eel-07', 'tar-01'])
    await said('link-found', 15, ['eel-07', 'tar-01'])
    await said('link-found', 14, ['eel-08', 'tar-02'])
    const raisedAt = new Date(overlay.now - 5 * MINUTE_MS)
    const { number } = await seedIncident(em(), {
      ...{ overlayId: seeded.overlay.id, teamId: seeded.team.teamId, raisedAt },
      sentence: 'link eel-07 – tar-01 lost',
    })
    const call = await seeded.team.callAs('viewer')
    const ends = { a: 'tar-01', b: 'eel-07' }
    const story = linkStorySchema.parse(await getLinkStory(call, seeded.overlay.slug, ends, last))
    expect(story).toMatchObject({
      a: { name: 'eel-07' },
      b: { name: 'tar-01' },
      link: { weight: 0.75, crossing: true },
      since: { at: iso(overlay.now - 15 * MINUTE_MS), atLeast: false },
      without: expect.closeTo(0.12, 12),
      course: [[overlay.now - 10 * MINUTE_MS, 0.85, 0.6]],
      events: [
        { at: iso(overlay.now - 15 * MINUTE_MS), kind: 'link-found' },
        { at: iso(overlay.now - 40 * MINUTE_MS), kind: 'link-lost' },
      ],
      incidents: [{ number }],
    })
  })

  it('that nobody names is told of by what is kept', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading()
    await keep(10)
    const call = await seeded.team.callAs('viewer')
    const ends = { a: 'eel-07', b: 'tar-01' }
    expect(await getLinkStory(call, seeded.overlay.slug, ends, last)).toMatchObject({
      ...{ link: null, since: null, without: null, events: [], incidents: [] },
      course: [[overlay.now - 10 * MINUTE_MS, 0.85, 0.6]],
    })
  })
})
