import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createRehearsal, getOverlay, listRehearsals } from '@/lib/data'
import { listOverlayIncidents } from '@/lib/data/incidents'
import { listNodes } from '@/lib/data/nodes'
import { listPartners } from '@/lib/data/partners'
import { requestFacts } from '@/lib/http/request-facts'
import { openSharedOverlay, type SharedOverlay, stored } from '@/tests/support/shared-overlay'

let shared: SharedOverlay
beforeAll(async () => {
  shared = await openSharedOverlay()
  await stored(shared.callAs('skerry', 'operator'), (call) =>
    createRehearsal(call, slug, { exclude: { nodes: ['ske-01'] } }),
  )
})
afterAll(() => shared.close())

const slug = 'tides'

/** Operator of the owning team and of a partner. */
function both(actingFor: string | null) {
  const call = shared.callAs('harbourline', 'operator')
  const { caller } = call
  const partner = shared.callAs('skerry', 'operator').caller
  if (caller.kind !== 'user' || partner.kind !== 'user') throw new Error('They are people.')
  return { ...call, caller: { ...caller, teams: [...caller.teams, ...partner.teams], actingFor } }
}

describe('who belongs to two of an overlay’s teams', () => {
  it('is offered the choice, and is of the owning team until they choose another of theirs', async () => {
    const overlay = await getOverlay(both('skerry'), slug)
    expect(overlay).toMatchObject({ standing: 'partner', as: { slug: 'skerry' }, runbookUrl: null })
    expect(overlay.seats?.map(({ slug: team, role }) => `${team} ${role}`)).toEqual([
      'harbourline operator',
      'skerry operator',
    ])
    for (const wish of [null, 'pinnet', 'nobody'])
      expect((await getOverlay(both(wish), slug)).as).toMatchObject({ slug: 'harbourline' })
  })

  it('sees what that team sees, and its own things alone', async () => {
    const ownNames = async (team: string) =>
      (await listNodes(both(team), slug, { limit: 100 })).items.flatMap(({ name, partner }) =>
        partner ? [] : [name],
      )
    expect([await ownNames('skerry'), await ownNames('harbourline')]).toEqual([
      ['ske-01', 'ske-02', 'ske-03'],
      ['tar-01', 'tar-02'],
    ])
    const rehearsed = async (team: string) =>
      (await listRehearsals(both(team), slug)).items.flatMap(({ exclude }) => exclude.nodes)
    expect([await rehearsed('skerry'), await rehearsed('harbourline')]).toEqual([['ske-01'], []])
  })

  it('has the incidents and the part of that team alone', async () => {
    const incidentsOf = async (team: string) =>
      (await listOverlayIncidents(both(team), slug, { limit: 10 })).items.map(({ number }) => number)
    const { incidents } = shared
    expect([await incidentsOf('skerry'), await incidentsOf('harbourline')]).toEqual([
      [incidents.skerry],
      [incidents.harbourline],
    ])
    const yours = async (team: string) =>
      (await listPartners(both(team), slug)).teams.filter(({ yours }) => yours).map(({ team }) => team.slug)
    expect([await yours('skerry'), await yours('harbourline')]).toEqual([['skerry'], ['harbourline']])
  })

  it('says so by a cookie of the page', () => {
    const setup = { address: 'http://thinspan.test', trustedProxies: 0 }
    const factsOf = (cookie: string) => requestFacts(new Headers({ cookie }), 'GET', setup).actingFor
    expect([factsOf('thinspan-acting=skerry'), factsOf('thinspan-sheet=night')]).toEqual(['skerry', null])
  })
})
