import { describe, expect, it } from 'vitest'
import { GET as exported } from '@/app/api/v1/overlays/[slug]/export/[file]/route'
import { ask, problemOf } from '@/tests/support/collector'
import { seedKnown } from '@/tests/support/known-overlay'
import { overlayPerTest } from '@/tests/support/overlay-per-test'

const seeded = overlayPerTest({ pace: 'calm' })
const get = (file: string) =>
  ask(exported, 'GET', { bearer: seeded.team.token('viewer'), params: { slug: seeded.overlay.slug, file } })

describe('what one may see, as files', () => {
  it('are saved, under the overlay’s name, and hold nodes and named links', async () => {
    const nodes = [
      { name: 'tar-01', labels: { office: 'Tarnwick' }, links: ['eel-09'] },
      { name: 'eel-09', links: ['tar-01'] },
    ]
    await seedKnown(seeded, 'named', nodes, { lambda2: 2 })
    const [links, table, graph] = await Promise.all(['links.csv', 'nodes.csv', 'overlay.graphml'].map(get))
    expect(links?.headers.get('content-disposition')).toContain(`${seeded.overlay.slug}-links.csv`)
    expect(await links?.text()).toMatch(/^source,[^\r]*\r\neel-09,tar-01,1,,no,live,[^\r]*\r\n$/)
    expect((await table?.text())?.split('\r\n')).toHaveLength(4)
    expect(graph?.headers.get('content-type')).toBe('application/graphml+xml')
    expect((await graph?.text())?.match(/<edge /g)).toHaveLength(1)
  })

  it('hold no link where none is named, and there are no others', async () => {
    await seedKnown(seeded, 'sealed', [{ name: 'tar-01', degree: 3 }], { lambda2: 1 })
    expect(await (await get('overlay.graphml')).text()).not.toContain('<edge ')
    expect((await problemOf(await get('agents.csv')))[0]).toBe(400)
    const foreign = ask(exported, 'GET', { params: { slug: seeded.overlay.slug, file: 'nodes.csv' } })
    expect(await problemOf(await foreign)).toEqual([401, 'not-signed-in'])
  })
})
