import { afterEach, describe, expect, test } from 'vitest'
import { freePort } from '../support/free-port'
import { LinkEnd } from '../support/link-end'
import { testOverlay } from '../support/passes'

const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')

describe('two agents over WebSocket', () => {
  const ends: LinkEnd[] = []
  afterEach(async () => {
    for (const end of ends.splice(0)) await end.stop()
  })
  const start = async (end: LinkEnd, port = 0): Promise<string> => {
    ends.push(end)
    return end.start(port)
  }
  const connections = (end: LinkEnd) => end.links.status().map((link) => link.connections)
  const linked = (a: LinkEnd, b: LinkEnd) => () =>
    a.links.isLinked(b.node.agentId) && b.links.isLinked(a.node.agentId)

  test('that both dial end up with one connection and one link', async () => {
    const [a, b] = [new LinkEnd(overlay, tar), new LinkEnd(overlay, gul)]
    const [addressA, addressB] = [await start(a), await start(b)]
    a.links.addNeighbour({ address: addressB })
    b.links.addNeighbour({ address: addressA })
    await a.until(linked(a, b))
    await a.until(() => connections(a)[0] === 1 && connections(b)[0] === 1 && a.heardAgo('gul-04') < 20)
    expect(a.events.filter(({ kind }) => kind === 'link-down')).toEqual([])
    expect(b.events.filter(({ kind }) => kind === 'link-down')).toEqual([])
    expect([a.links.known, b.links.known]).toEqual([1, 1])
  })

  test('find each other whichever comes first', async () => {
    const [a, b] = [new LinkEnd(overlay, tar), new LinkEnd(overlay, gul)]
    const port = await freePort()
    const address = await start(b, port)
    await b.stop()
    await start(a)
    a.links.addNeighbour({ address, agentId: 'gul-04' })
    await new Promise((resolve) => setTimeout(resolve, 60))
    const late = new LinkEnd(overlay, gul, { life: 1 })
    await start(late, port)
    await a.until(linked(a, late))
  })

  test('link again after one was started anew, and the links know the new start', async () => {
    const [a, b] = [new LinkEnd(overlay, tar), new LinkEnd(overlay, gul)]
    const port = await freePort()
    const address = await start(b, port)
    await start(a)
    a.links.addNeighbour({ address })
    await a.until(linked(a, b))
    await b.stop()
    await a.until(() => !a.links.isLinked('gul-04'))
    expect(a.events.at(-1)).toEqual({ kind: 'link-down', peer: 'gul-04', reason: 'going-away' })
    const again = new LinkEnd(overlay, gul, { life: 1 })
    await start(again, port)
    await a.until(linked(a, again))
    expect(a.node.isRetired('gul-04', 'incarnation-gul-04-0')).toBe(true)
  })

  test('take a link down at one end: frames until settled, then it stays down, and can be taken up again', async () => {
    const [a, b] = [new LinkEnd(overlay, tar), new LinkEnd(overlay, gul)]
    const address = await start(b)
    await start(a)
    a.links.addNeighbour({ address, agentId: 'gul-04' })
    await a.until(linked(a, b))
    expect(b.links.removeNeighbour('tar-01')).toBe(true)
    await b.until(() => !b.links.isLinked('tar-01') && !a.links.isLinked('gul-04'))
    expect(b.node.linkState('tar-01')).toBe('closed')
    expect(a.node.linkState('gul-04')).toBe('closed')
    expect(a.events.find(({ kind }) => kind === 'link-down')?.reason).toBe('link-removed')
    await new Promise((resolve) => setTimeout(resolve, 150))
    expect(b.links.isLinked('tar-01')).toBe(false)
    b.links.addNeighbour({ agentId: 'tar-01' })
    await b.until(linked(a, b))
    await b.until(() => b.node.linkState('tar-01') === 'open' && a.node.linkState('gul-04') === 'open')
  })

  test('of two processes with one configuration the later one stays linked, and they do not take turns', async () => {
    const [first, second, b] = [
      new LinkEnd(overlay, tar),
      new LinkEnd(overlay, tar, { life: 1 }),
      new LinkEnd(overlay, gul),
    ]
    const address = await start(b)
    await start(first)
    await start(second)
    first.links.addNeighbour({ address })
    await first.until(linked(first, b))
    second.links.addNeighbour({ address })
    const turnedAway = () =>
      first.events.filter(({ kind, reason }) => kind === 'link-down' && reason === 'stale-incarnation').length
    await first.until(() => turnedAway() >= 4)
    expect(b.events).toEqual([
      { kind: 'link-up', peer: 'tar-01', reason: '' },
      { kind: 'link-up', peer: 'tar-01', reason: '' },
    ])
    expect(second.events).toEqual([{ kind: 'link-up', peer: 'gul-04', reason: '' }])
  })

  test('a quality that is none is refused where it is said, and the link comes up as if it had not been', async () => {
    const [a, b] = [new LinkEnd(overlay, tar), new LinkEnd(overlay, gul)]
    const address = await start(b)
    await start(a)
    a.links.addNeighbour({ address })
    for (const quality of [2, -0.1, Number.NaN]) {
      expect(() => a.links.setQuality(address, quality)).toThrow(RangeError)
      expect(() => a.links.setQuality('gul-04', quality)).toThrow(RangeError)
    }
    await a.until(linked(a, b))
  })

  test('removing a neighbour nobody knows changes nothing', async () => {
    const a = new LinkEnd(overlay, tar)
    await start(a)
    expect(a.links.removeNeighbour('ws://nowhere.example:1')).toBe(false)
  })
})
