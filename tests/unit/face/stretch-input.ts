import fc from 'fast-check'
import type { StretchInput, StretchLink, StretchNode } from '@/lib/face/stretch'

const HARBOURS = ['Tarnwick', 'Gullhythe', 'Pinnet Bay', 'Eelholm']

/** Overlays as the pages get them: crowded or spread values, some missing, sides or none, links named or hidden. */
export const stretchInputs = (max = 200): fc.Arbitrary<StretchInput> =>
  fc
    .record({
      count: fc.integer({ min: 2, max }),
      crowd: fc.constantFrom(0, 0.02, 0.3, 3),
      missing: fc.constantFrom(0, 0.1, 1),
      unsided: fc.constantFrom(0, 0.1),
      sided: fc.boolean(),
      laneKey: fc.constantFrom('harbour', 'rack', null),
      width: fc.integer({ min: 320, max: 1400 }),
      named: fc.boolean(),
      crossing: fc.integer({ min: 0, max: 14 }),
      seed: fc.integer({ min: 1, max: 2 ** 31 - 1 }),
    })
    .map((c) => {
      const random = lcg(c.seed)
      const nodes = Array.from({ length: c.count }, (_, i): StretchNode => {
        const side = i % 2 === 0 ? 'a' : 'b'
        const value = (side === 'a' ? -1 : 1) + c.crowd * (random() - 0.5)
        return {
          name: `node-${String(i).padStart(4, '0')}`,
          labels: {
            harbour: HARBOURS[Math.floor(random() * 4)] ?? '',
            rack: `r${Math.floor(random() * 30)}`,
          },
          side: c.sided && random() >= c.unsided ? side : null,
          value: random() < c.missing ? null : value,
          state: random() < 0.1 ? 'unheard' : 'heard',
          degree: 3,
        }
      })
      const links = Array.from({ length: c.named ? c.crossing : 0 }, (_, i): StretchLink => {
        const pick = (of: string) => {
          const from = nodes.filter((n) => n.side === of)
          return from[Math.floor(random() * from.length)]?.name ?? 'node-0000'
        }
        return {
          a: pick('a'),
          b: pick('b'),
          weight: 1,
          share: random() / (i + 1),
          crossing: true,
          state: 'live',
        }
      })
      return {
        nodes,
        links,
        laneKey: c.laneKey,
        sided: c.sided,
        crossingLinks: c.crossing,
        silent: false,
        width: c.width,
      }
    })

/** Lehmer generator (Park and Miller 1988, multiplier 48271), so that a failing case can be run again. */
export function lcg(seed: number): () => number {
  let state = seed % 2147483647
  return () => {
    state = (state * 48271) % 2147483647
    return state / 2147483647
  }
}
