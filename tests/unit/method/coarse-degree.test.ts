import { describe, expect, it } from 'vitest'
import { randomRegular } from '@/lib/method/graphs'
import { CoarseDegree, DEGREE_RENEWED_MS } from '@/lib/method/node/facts'
import { createRandom } from '@/lib/method/random'
import { namedByDegrees } from '@/scripts/bench/leak/degrees'
import { chanceOf } from '@/scripts/bench/leak/shares'

/** Degrees in turn, an hour apart, and what is said of each. */
const courses: [what: string, degrees: number[], said: number[]][] = [
  ['is the nearest power of two', [6, 6, 6], [8, 8, 8]],
  ['stays as a link goes and comes back', [6, 6, 5, 6], [8, 8, 8, 8]],
  ['stays until it is wrong by more than twice', [6, 6, 4, 3, 3], [8, 8, 8, 4, 4]],
  ['follows upwards by the same rule', [6, 6, 16, 17, 9], [8, 8, 8, 16, 16]],
  ['is renewed once without it: links were only coming up', [1, 5, 5], [1, 4, 4]],
  ['is 0 without links, and begins anew after that', [6, 6, 0, 2, 6, 5], [8, 8, 0, 2, 8, 8]],
  ['stays at one link and at two', [1, 1, 2, 1], [1, 1, 1, 1]],
]

describe('a degree that is said coarsely', () => {
  it.each(courses)('%s', (_what, degrees, said) => {
    const coarse = new CoarseDegree()
    expect(degrees.map((degree, hour) => coarse.say(degree, hour * DEGREE_RENEWED_MS, () => 0.5))).toEqual(
      said,
    )
  })

  it('is not said anew within the hour', () => {
    const coarse = new CoarseDegree()
    const say = (degree: number, atMs: number) => coarse.say(degree, atMs, () => 0)
    say(6, 0)
    say(6, DEGREE_RENEWED_MS)
    expect([say(1, 2 * DEGREE_RENEWED_MS - 1), say(1, 2 * DEGREE_RENEWED_MS)]).toEqual([8, 1])
  })
})

describe('degrees said over a day in which links go and come back, with the count of all links', () => {
  /** Always the nearest power, each node at an hour of its own. */
  class Nearest {
    private said = 0
    private renewAtMs = 0
    say(degree: number, nowMs: number, uniform: () => number): number {
      if (nowMs < this.renewAtMs) return this.said
      this.renewAtMs = nowMs + DEGREE_RENEWED_MS * (this.said ? 1 : uniform())
      this.said = 2 ** Math.round(Math.log2(degree))
      return this.said
    }
  }
  const graph = randomRegular(60, 6, createRandom('degrees of a day'))
  const init = { seed: 1, hours: 24, lostPerHour: 1 }

  it('name no more links than chance does, and 3 points', () => {
    expect(namedByDegrees(graph, init).every).toBeLessThan(chanceOf(graph) + 0.03)
  })

  it('would name most of the surest if they were always the nearest power of two', () => {
    const { every, surest } = namedByDegrees(graph, init, () => new Nearest())
    expect(every).toBeGreaterThan(chanceOf(graph) + 0.06)
    expect(surest).toBeGreaterThan(0.7)
  })
})
