import { describe, expect, it } from 'vitest'
import { type Dot, dotFinder, dotPaths } from '@/lib/face/stretch'
import { createRandom } from '@/lib/method/random'

const dot = (name: string, x: number, y: number, over: Partial<Dot> = {}): Dot => ({
  node: { name, labels: {}, side: null, value: 0, state: 'heard', degree: 1 },
  ...{ x, y, radius: 2.5, side: null, shape: 'round', unheard: false, parked: false, ...over },
})

describe('thousands of dots', () => {
  it('are found where a look through all of them finds them', () => {
    const random = createRandom('dots')
    const dots = Array.from({ length: 500 }, (_, at) =>
      dot(`n${at}`, random.uniform() * 300, random.uniform() * 200),
    )
    const find = dotFinder(dots)
    let found = 0
    for (let look = 0; look < 500; look++) {
      const [x, y] = [random.uniform() * 320 - 10, random.uniform() * 220 - 10]
      const distance = (d: Dot) => Math.hypot(d.x - x, d.y - y)
      const nearest = dots.reduce((best, d) => (distance(d) < distance(best) ? d : best))
      const expected = distance(nearest) <= 5.5 ? nearest : null
      expect(find(x, y)).toBe(expected)
      if (expected) found++
    }
    expect(found).toBeGreaterThan(100)
    expect(dotFinder([])(1, 1)).toBeNull()
  })

  it('are as few paths as they have looks, each dot in one', () => {
    const paths = dotPaths([
      dot('a', 10, 20, { side: 'a' }),
      dot('b', 30, 20, { side: 'a' }),
      dot('c', 50, 20, { side: 'b', shape: 'square' }),
      dot('d', 70, 20, { side: 'b', shape: 'square', unheard: true }),
    ])
    expect(paths.map(({ side, unheard, away }) => [side, unheard, away])).toEqual([
      ['a', false, false],
      ['b', false, false],
      ['b', true, false],
    ])
    expect(paths[0]?.path).toBe(
      'M7.5 20a2.5 2.5 0 1 0 5 0a2.5 2.5 0 1 0 -5 0zM27.5 20a2.5 2.5 0 1 0 5 0a2.5 2.5 0 1 0 -5 0z',
    )
    expect(paths[1]?.path).toBe('M47.5 17.5h5v5h-5z')
    expect(paths[2]?.path).toBe('M68.4 18.4h3.2v3.2h-3.2z')
  })
})
