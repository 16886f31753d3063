import { describe, expect, it } from 'vitest'
import { compare, EXACT_EVERY_MS, ExactCheck } from '@/lib/collector/exact'
import type { Loaded } from '@/lib/collector/leader-load'
import type { Reading } from '@/lib/data/dto'
import { runJob } from '@/lib/reckon/jobs'
import { someReport } from '../../support/reports'

const START = Date.parse('2026-12-02T10:00:00.000Z')
const said = { lambda2: 1, low: 0.99, high: 1.01, data: 'fresh', level: 'firm' } as const

describe('exact figure and reading', () => {
  it.each([
    ['agree within noise', 1.02, said, 'agrees'],
    ['agree within what a reading may lag by, whatever its interval says', 1.04, said, 'agrees'],
    ['are apart beyond both', 1.08, said, 'apart'],
    ['agree further off where the interval is wide', 1.2, { ...said, low: 0.9, high: 1.1 }, 'agrees'],
    ['are not compared while the reading settles', 2, { ...said, data: 'settling' as const }, 'unsure'],
    ['are not compared while it is withheld', 2, { ...said, lambda2: null }, 'unsure'],
    ['agree that the overlay is split', 0, { ...said, lambda2: 1e-5, level: 'split' as const }, 'agrees'],
    ['are apart where only the links are split', 0, said, 'apart'],
  ])('%s', (_, exact, reading, expected) => expect(compare(exact, reading)).toBe(expected))
})

/** A ring of four whose agents name their links; gul-04 does not name pin-02 back where `oneEnd`. */
function loaded(atMs: number, { oneEnd = false, disclosure = 'named' as Loaded['disclosure'] } = {}): Loaded {
  const names = ['tar-01', 'gul-04', 'pin-02', 'eel-09']
  const agents = names.map((name, at) => {
    const report = someReport(1)
    const peers = [names[(at + 1) % 4]!, names[(at + 3) % 4]!]
    const links = peers
      .filter((peer) => !(oneEnd && name === 'gul-04' && peer === 'pin-02'))
      .map((peer) => ({ peer, weight: 1, share: null }))
    return {
      ...{ agentId: name, name, labels: {}, teamId: 'harbourline', joinedAtMs: 0 },
      last: { report: { ...report, node: { ...report.node, links } }, receivedAtMs: atMs },
    }
  })
  return {
    ...{ pace: 'steady', disclosure, weights: 'unit', retireAfterHours: null, shut: [], leftOutNames: [] },
    ...{ rehearsals: [], floors: [] },
    ...{ key: { publicKey: '', privateKey: '' }, keysInTurn: [], snapshot: { atMs, agents } },
    ...{ rehearsals: [], floors: [] },
  }
}

const reading = (atMs: number, lambda2: number) =>
  ({ ...said, at: new Date(atMs).toISOString(), lambda2, low: lambda2, high: lambda2 }) as unknown as Reading

describe('the standing check of named overlays', () => {
  const here = () => {
    let asked = 0
    const check = new ExactCheck({
      reckon: async (name, what) => {
        asked++
        const done = runJob({ id: 1, name, asked: what })
        if ('error' in done) throw new Error(done.error)
        return done.answer as never
      },
    })
    return { check, asked: () => asked }
  }

  it('works out λ₂ of the named links, once a minute, and shows it for three', async () => {
    const { check, asked } = here()
    await check.look(loaded(START), reading(START, 2))
    await check.look(loaded(START + 30_000), reading(START + 30_000, 2))
    expect(asked()).toBe(1)
    expect(check.latest(START)).toEqual({
      ...{ at: '2026-12-02T10:00:00.000Z', links: 4, oneEnd: 0, reading: 2, check: 'agrees' },
      lambda2: expect.closeTo(2, 9),
    })
    await check.look(loaded(START + EXACT_EVERY_MS, { oneEnd: true }), reading(START + EXACT_EVERY_MS, 2))
    expect(check.latest(START + EXACT_EVERY_MS)).toMatchObject({ links: 4, oneEnd: 1 })
    expect(check.latest(START + 5 * EXACT_EVERY_MS)).toBeNull()
  })

  it('calls them apart only twice in a row', async () => {
    const { check } = here()
    const checks = []
    for (const [at, value] of [2, 3, 3, 3, 2, 3].entries()) {
      const atMs = START + at * EXACT_EVERY_MS
      await check.look(loaded(atMs), reading(atMs, value))
      checks.push(check.latest(atMs)?.check)
    }
    expect(checks).toEqual(['agrees', 'unsure', 'apart', 'apart', 'agrees', 'unsure'])
  })

  it('asks nothing where links are not named, and shows nothing old', async () => {
    const { check, asked } = here()
    await check.look(loaded(START), reading(START, 2))
    await check.look(loaded(START + 1, { disclosure: 'flagged' }), reading(START, 2))
    expect([asked(), check.latest(START + 1)]).toEqual([1, null])
  })

  it('goes on after the thread could not answer', async () => {
    const check = new ExactCheck({ reckon: () => Promise.reject(new Error('ended')) })
    await expect(check.look(loaded(START), reading(START, 2))).rejects.toThrow('ended')
    await expect(check.look(loaded(START + 90_000), reading(START, 2))).rejects.toThrow('ended')
  })
})
