import { describe, expect, it } from 'vitest'
import { POST as joined } from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/joined/route'
import { DELETE as withdraw } from '@/app/api/v1/overlays/[slug]/reinforcement/planned/[id]/route'
import { POST as plan } from '@/app/api/v1/overlays/[slug]/reinforcement/planned/route'
import { GET as advise } from '@/app/api/v1/overlays/[slug]/reinforcement/route'
import { AuditEntrySchema } from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { loadOverlay } from '@/lib/collector/leader-load'
import { PlannedLinks, SETTLED_MS } from '@/lib/collector/planned'
import type { Reading } from '@/lib/data/dto'
import { plannedLinkSchema, reinforcementSchema } from '@/lib/data/reinforcement-dto'
import { sql } from '@/lib/db'
import type { RouteHandler } from '@/lib/http/route'
import { dumbbell } from '@/lib/method/graphs'
import { withLink } from '@/lib/method/reinforce'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { ask, problemOf } from '@/tests/support/collector'
import { type SeededNode, seedKnown } from '@/tests/support/known-overlay'
import { overlayPerTest } from '@/tests/support/overlay-per-test'

const seeded = overlayPerTest({ pace: 'calm' })
type Init = { id?: string; body?: unknown; query?: string }
const as = (role: Role, handler: RouteHandler, method: string, { id, body, query }: Init = {}) =>
  ask(handler, method, {
    bearer: seeded.team.token(role),
    params: { slug: seeded.overlay.slug, ...(id === undefined ? {} : { id }) },
    ...(body === undefined ? {} : { body }),
    ...(query === undefined ? {} : { query }),
  })
const advice = async (query = '', role: Role = 'viewer') =>
  reinforcementSchema.parse(await (await as(role, advise, 'GET', { query })).json())

/** Two complete graphs of four with one bridge; the first half in Tarnwick, the second in Eelholm. */
const GRAPH = dumbbell(4, 1)
const nameOf = (node: number) => (node < 4 ? `tar-0${node + 1}` : `eel-0${node - 3}`)
const NODES: SeededNode[] = Array.from({ length: 8 }, (_, node) => ({
  name: nameOf(node),
  labels: { office: node < 4 ? 'Tarnwick' : 'Eelholm', rack: String(node % 2) },
  value: node < 4 ? -1 : 1,
  links: Array.from(GRAPH.targets.slice(GRAPH.offsets[node]!, GRAPH.offsets[node + 1]!), nameOf),
}))
const { lambda2: EXACT, lambda3: LAMBDA3 } = algebraicConnectivity(GRAPH)
const numberOf = (name: string) => NODES.findIndex((node) => node.name === name)
const SEALED = NODES.map(({ links, ...node }) => ({ ...node, degree: links?.length ?? 0 }))

describe('reinforcement of an overlay whose links are named', () => {
  it('proposes the links that raise λ₂ most, with the exact figure of each', async () => {
    await seedKnown(seeded, 'named', NODES, { lambda2: EXACT })
    const found = await advice('?links=2')
    expect(found).toMatchObject({
      method: 'exact',
      nothing: null,
      nodes: 8,
      core: false,
      weight: 1,
      planned: [],
    })
    expect(found.lambda2).toBeCloseTo(EXACT, 9)
    let graph = GRAPH
    for (const { a, b, lambda2, gain } of found.proposals) {
      const before = algebraicConnectivity(graph).lambda2
      graph = withLink(graph, numberOf(a.name), numberOf(b.name), 1)
      expect(algebraicConnectivity(graph).lambda2).toBeCloseTo(lambda2, 9)
      expect(gain).toBeCloseTo(lambda2 - before, 9)
      expect([a.labels.office, b.labels.office]).toEqual(['Eelholm', 'Tarnwick'])
    }
    const [first] = found.proposals
    const names = `${first?.b.name} with ${first?.a.name}|${first?.a.name} with ${first?.b.name}`
    expect(found.sentence).toMatch(
      new RegExp(`^Linking (${names}) would raise the reading from 0\\.\\d{3} to about 0\\.\\d{3}\\.$`),
    )
  })

  it('keeps to what is asked: one label value, few nodes, few links a node', async () => {
    await seedKnown(seeded, 'named', NODES, { lambda2: EXACT })
    const between = await advice('?links=3&between=rack')
    for (const { a, b } of between.proposals) expect(a.labels.rack).not.toBe(b.labels.rack)
    const few = await advice('?links=3&nodes=tar-02,%20eel-02')
    expect(few.proposals.map(({ a, b }) => [a.name, b.name])).toEqual([['eel-02', 'tar-02']])
    expect(await advice('?label=office%3DTarnwick')).toMatchObject({ nothing: 'no-pair', proposals: [] })
    expect(await advice('?mostDegree=3')).toMatchObject({ nothing: 'no-pair' })
    expect(await problemOf(await as('viewer', advise, 'GET', { query: '?nodes=pin-09' }))).toEqual([
      400,
      'invalid-input',
    ])
    expect(await problemOf(await as('viewer', advise, 'GET', { query: '?links=0' }))).toEqual([
      400,
      'invalid-input',
    ])
  })

  it('joins the pieces of a split overlay first', async () => {
    const split = NODES.map((node) => ({
      ...node,
      links: node.links!.filter((peer) => peer.slice(0, 3) === node.name.slice(0, 3)),
    }))
    await seedKnown(seeded, 'named', split, { lambda2: 0, level: 'split' })
    const { proposals, sentence } = await advice('?links=1')
    expect(proposals[0]?.a.name.slice(0, 3)).not.toBe(proposals[0]?.b.name.slice(0, 3))
    expect(proposals[0]?.lambda2).toBeCloseTo(EXACT, 9)
    expect(sentence).toMatch(/from 0\.000 to about/)
  })

  it('leaves loose ends out, as the headline does', async () => {
    const ids = await seedKnown(seeded, 'named', NODES, { lambda2: EXACT })
    const apart = ids.get('tar-02')
    await sql(
      seeded.em(),
      `update controls set state = jsonb_set(state, '{memory,apart}', to_jsonb(?::text)) where overlay_id = ?`,
      [apart!, seeded.overlay.id],
    )
    const found = await advice()
    expect([found.nodes, found.core]).toEqual([7, true])
    expect(found.proposals.flatMap(({ a, b }) => [a.name, b.name])).not.toContain('tar-02')
  })
})

describe('reinforcement of a sealed overlay', () => {
  it('goes by the nodes’ values, and says no more than they allow', async () => {
    await seedKnown(seeded, 'sealed', SEALED, { lambda2: EXACT, lambda3AtMost: LAMBDA3 })
    const { method, proposals, sentence, ceiling } = await advice('?links=2')
    expect([method, ceiling]).toEqual(['first-order', null])
    expect(proposals).toHaveLength(2)
    // The ends of the one link across have more links than others.
    for (const { a, b } of proposals) expect([a.name, b.name]).not.toEqual(['eel-01', 'tar-01'])
    // Whichever pair across it is, and whether linked already or not, is not known.
    const best = Math.max(
      ...[0, 1, 2, 3].flatMap((a) =>
        [4, 5, 6, 7].flatMap((b) =>
          GRAPH.targets.slice(GRAPH.offsets[a]!, GRAPH.offsets[a + 1]!).includes(b)
            ? []
            : [algebraicConnectivity(withLink(GRAPH, a, b, 1)).lambda2],
        ),
      ),
    )
    expect(best).toBeLessThanOrEqual(proposals[0]!.lambda2)
    // Nodes say on which side they lie and no more, so that a link adds 2 at most, whatever their values.
    expect(sentence).toMatch(/^Linking .* could raise the reading from 0\.354 to at most 2\.355\.$/)
  })

  it.each<[string, Partial<Reading> & Pick<Reading, 'lambda2'>, string]>([
    ['it has come apart', { lambda2: 0, level: 'split' }, 'split'],
    ['no cut stands out', { lambda2: 1, singleCut: false }, 'no-single-cut'],
    ['too many are unheard', { lambda2: null, data: 'unheard' }, 'unheard'],
    ['there is no reading', { lambda2: null, data: 'settling' }, 'no-reading'],
  ])('proposes nothing where %s', async (_, reading, nothing) => {
    await seedKnown(seeded, 'sealed', SEALED, reading)
    expect(await advice()).toMatchObject({ nothing, method: null, proposals: [] })
  })

  it('proposes nothing while values are not told, or may have the other sign', async () => {
    await seedKnown(seeded, 'sealed', SEALED, { lambda2: 1 }, { signSince: 6 })
    expect(await advice()).toMatchObject({ nothing: 'few-values' })
  })

  it('proposes nothing of an overlay that nobody has joined', async () => {
    expect(await advice()).toMatchObject({ nothing: 'no-reading', nodes: 0 })
  })
})

describe('a planned link', () => {
  const make = async (body = { a: 'tar-02', b: 'eel-02' }) =>
    plannedLinkSchema.parse(await (await as('operator', plan, 'POST', { body })).json())

  it('is kept with what is foretold of it alone, once, and only by operators', async () => {
    await seedKnown(seeded, 'named', NODES, { lambda2: EXACT })
    const made = await make()
    const forecast = algebraicConnectivity(withLink(GRAPH, numberOf('tar-02'), numberOf('eel-02'), 1)).lambda2
    expect(made).toMatchObject({ a: 'eel-02', b: 'tar-02', state: 'planned', method: 'exact', before: null })
    expect(made.forecast).toBeCloseTo(forecast, 9)
    expect(made.lambda2Then).toBeCloseTo(EXACT, 9)
    expect((await advice()).planned).toEqual([made])
    const body = { a: 'eel-02', b: 'tar-02' }
    expect(await problemOf(await as('operator', plan, 'POST', { body }))).toEqual([409, 'in-use'])
    expect(await problemOf(await as('viewer', plan, 'POST', { body }))).toEqual([403, 'forbidden'])
    const strange = { a: 'eel-02', b: 'pin-07' }
    expect(await problemOf(await as('operator', plan, 'POST', { body: strange }))).toEqual([404, 'not-found'])
    const linked = { a: 'tar-01', b: 'tar-02' }
    expect(await problemOf(await as('operator', plan, 'POST', { body: linked }))).toEqual([
      409,
      'wrong-state',
    ])
    const entry = await seeded.em().findOneOrFail(AuditEntrySchema, {
      action: 'reinforcement.plan',
      outcome: 'ok',
      subject: `${seeded.overlay.slug}: eel-02 – tar-02`,
    })
    expect(entry.actorKind).toBe('token')
  })

  it('is followed: the reading before it, when it is named, and the reading with it', async () => {
    await seedKnown(seeded, 'named', NODES, { lambda2: EXACT })
    await make()
    const id = seeded.overlay.id
    const loaded = (await loadOverlay(seeded.em(), id))!
    const planned = new PlannedLinks({ forkEm: async () => seeded.em() }, { overlayId: id, holder: 'one' })
    const reading = (lambda2: number) => ({ data: 'fresh', lambda2, core: null }) as Reading
    const lookAt = (ms: number, lambda2: number, isLinked: boolean, holder = planned) => {
      const atMs = loaded.snapshot.atMs + ms
      const peer = loaded.snapshot.agents.find(({ name }) => name === 'tar-02')!.agentId
      const agents = loaded.snapshot.agents.map((agent) =>
        agent.last
          ? {
              ...agent,
              last: {
                receivedAtMs: atMs,
                report: {
                  ...agent.last.report,
                  node: {
                    ...agent.last.report.node,
                    links: isLinked && agent.name === 'eel-02' ? [{ peer, weight: 1, share: null }] : [],
                  },
                },
              },
            }
          : agent,
      )
      return holder.look({ ...loaded, snapshot: { atMs, agents } }, reading(lambda2))
    }
    const now = async () => (await advice()).planned[0]
    await lookAt(0, 0.2, false)
    expect(await now()).toMatchObject({ state: 'planned', before: { lambda2: 0.2 }, after: null })
    const other = new PlannedLinks({ forkEm: async () => seeded.em() }, { overlayId: id, holder: 'replaced' })
    await lookAt(60_000, 0.9, true, other)
    expect(await now()).toMatchObject({ state: 'planned', before: { lambda2: 0.2 } })
    await lookAt(60_000, 0.3, true)
    expect(await now()).toMatchObject({
      state: 'joined',
      seenBy: 'named',
      before: { lambda2: 0.2 },
      after: null,
    })
    await lookAt(60_000 + SETTLED_MS, 0.37, true)
    expect(await now()).toMatchObject({ before: { lambda2: 0.2 }, after: { lambda2: 0.37 } })
    await lookAt(120_000 + SETTLED_MS, 0.5, true)
    expect(await now()).toMatchObject({ after: { lambda2: 0.37 } })
  })

  it('is joined by an operator’s word, or withdrawn, and neither twice', async () => {
    await seedKnown(seeded, 'sealed', SEALED, { lambda2: EXACT })
    const [first, second] = [await make(), await make({ a: 'tar-03', b: 'eel-03' })]
    expect(first).toMatchObject({ method: 'first-order', state: 'planned' })
    const said = plannedLinkSchema.parse(
      await (await as('operator', joined, 'POST', { id: first.id })).json(),
    )
    expect(said).toMatchObject({ state: 'joined', seenBy: 'operator' })
    expect(await problemOf(await as('operator', withdraw, 'DELETE', { id: first.id }))).toEqual([
      409,
      'wrong-state',
    ])
    expect(await problemOf(await as('viewer', withdraw, 'DELETE', { id: second.id }))).toEqual([
      403,
      'forbidden',
    ])
    expect(await (await as('operator', withdraw, 'DELETE', { id: second.id })).json()).toMatchObject({
      state: 'withdrawn',
    })
    expect(await problemOf(await as('operator', joined, 'POST', { id: second.id }))).toEqual([
      409,
      'wrong-state',
    ])
    expect(await problemOf(await as('operator', joined, 'POST', { id: 'none' }))).toEqual([404, 'not-found'])
    // The pair may be planned again.
    expect(await make({ a: 'tar-03', b: 'eel-03' })).toMatchObject({ state: 'planned' })
  })
})
