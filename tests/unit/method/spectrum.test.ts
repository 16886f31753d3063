import { describe, expect, it } from 'vitest'
import { edgesOf, fromEdges, type SparseGraph, weightedDegrees } from '@/lib/method/graph'
import {
  hubOnRegular,
  path,
  preferentialAttachment,
  randomRegular,
  ring,
  star,
  twoClusters,
} from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import {
  algebraicConnectivity,
  crossingOf,
  krylovRounds,
  laplacian,
  linkShares,
  NotConvergedError,
  rayleighQuotient,
  type SpectrumMethod,
  spectrum,
  sweepCut,
  synchronousPowerIteration,
} from '@/lib/method/spectrum'
import { randomUnit } from '@/lib/method/spectrum/vectors'

const methods: SpectrumMethod[] = ['dense', 'lanczos']
const near = (value: number, expected: number, within = 1e-9) =>
  expect(Math.abs(value - expected), `${value} is not ${expected}`).toBeLessThan(within)

describe('laplacian', () => {
  it('has weighted degrees on the diagonal and −w beside it', () => {
    const graph = fromEdges(3, [
      [0, 1, 0.5],
      [1, 2],
    ])
    expect(laplacian(graph).to2DArray()).toEqual([
      [0.5, -0.5, 0],
      [-0.5, 1.5, -1],
      [0, -1, 1],
    ])
  })
})

describe('rayleighQuotient', () => {
  it('is 0 on constants, λ on eigenvectors, and the same for any scale', () => {
    const graph = path(4)
    expect(rayleighQuotient(graph, Float64Array.of(7, 7, 7, 7))).toBe(0)
    near(rayleighQuotient(graph, Float64Array.of(1, -1, -1, 1)), 2)
    near(rayleighQuotient(graph, Float64Array.of(3, -3, -3, 3)), 2)
  })
})

describe.each(methods)('the smallest graphs, %s', (method) => {
  it('a single node has λ₂ = 0 by convention', () => {
    expect(spectrum(fromEdges(1, []), { method })).toEqual({
      values: Float64Array.of(0),
      vectors: [Float64Array.of(1)],
      residual: 0,
      method,
    })
    expect(algebraicConnectivity(fromEdges(1, []), { method })).toMatchObject({
      lambda2: 0,
      lambda3: null,
      fiedler: Float64Array.of(0),
      multiplicityHint: 0,
    })
  })

  it('two nodes have λ₂ = 2w', () => {
    const { lambda2, lambda3, fiedler, multiplicityHint } = algebraicConnectivity(
      fromEdges(2, [[0, 1, 0.3]]),
      { method },
    )
    near(lambda2, 0.6)
    expect(lambda3).toBeNull()
    near(Math.abs(fiedler[0]!), Math.SQRT1_2)
    near(fiedler[0]! + fiedler[1]!, 0)
    expect(multiplicityHint).toBe(1)
  })

  it('two nodes without a link are split', () => {
    const { lambda2, fiedler } = algebraicConnectivity(fromEdges(2, []), { method })
    expect(lambda2).toBe(0)
    near(Math.abs(fiedler[0]! - fiedler[1]!), Math.SQRT2)
  })

  it('a graph in two pieces has λ₂ = 0 exactly, a vector that tells the pieces apart, and the right λ₃', () => {
    const graph = fromEdges(5, [
      [0, 3],
      [1, 2],
      [2, 4],
    ])
    const { lambda2, lambda3, fiedler, multiplicityHint } = algebraicConnectivity(graph, { method })
    expect(lambda2).toBe(0)
    expect(multiplicityHint).toBe(1)
    near(lambda3!, 1)
    near(fiedler[0]!, fiedler[3]!)
    near(fiedler[1]!, fiedler[2]!)
    near(fiedler[1]!, fiedler[4]!)
    expect(fiedler[0]! * fiedler[1]!).toBeLessThan(0)
    expect(linkShares(graph, fiedler, lambda2).map(({ share }) => share)).toEqual([0, 0, 0])
    expect(sweepCut(graph, fiedler)?.ratio).toMatchObject({ value: 0, links: 0 })
  })

  it('three pieces give λ₂ = λ₃ = 0', () => {
    const { lambda2, lambda3, multiplicityHint } = algebraicConnectivity(fromEdges(4, [[0, 1]]), { method })
    expect({ lambda2, lambda3, multiplicityHint }).toEqual({ lambda2: 0, lambda3: 0, multiplicityHint: 2 })
  })

  it('refuses an empty graph and a bad count', () => {
    expect(() => spectrum(fromEdges(0, []), { method })).toThrow('spectrum: the graph has no nodes')
    expect(() => spectrum(path(3), { method, count: 4 })).toThrow(
      'spectrum: count must be from 1 to 3, got 4',
    )
    expect(() => algebraicConnectivity(path(3), { method, count: 1 })).toThrow('count must be at least 2')
  })
})

describe('Lanczos on larger graphs', () => {
  const random = createRandom('larger')
  it.each<[string, SparseGraph]>([
    ['a hub of degree 200', hubOnRegular({ nodes: 220, degree: 8, hubDegree: 200 }, random)],
    ['two clusters', twoClusters({ perSide: 60, degree: 6, links: 3 }, random)],
    ['preferential attachment', preferentialAttachment(200, 2, random)],
    [
      'very unequal weights',
      fromEdges(
        120,
        edgesOf(randomRegular(120, 4, random)).map(([a, b], i) => [a, b, 10 ** -(i % 5)]),
      ),
    ],
  ])('agrees with the dense method: %s', (_, graph) => {
    const dense = spectrum(graph, { method: 'dense', count: 4 })
    const sparse = spectrum(graph, { method: 'lanczos', count: 4 })
    for (const [i, value] of dense.values.entries()) near(sparse.values[i]!, value)
  })

  it('finds the double λ₂ of a ring of 600 (closed form 2 − 2cos(2π/n): Mohar 1991)', () => {
    const { lambda2, lambda3, method, multiplicityHint } = algebraicConnectivity(ring(600))
    const expected = 2 - 2 * Math.cos((2 * Math.PI) / 600)
    expect({ method, multiplicityHint }).toEqual({ method: 'lanczos', multiplicityHint: 2 })
    near(lambda2 / expected, 1)
    near(lambda3! / expected, 1)
  })

  it('converges for 2,000 nodes of degree 8', () => {
    const graph = randomRegular(2000, 8, random)
    const { residual, method, lambda2 } = algebraicConnectivity(graph, { count: 2 })
    expect(method).toBe('lanczos')
    expect(residual).toBeLessThan(1e-8)
    // Alon and Boppana: not above d − 2√(d−1) but for o(1); J. Friedman: nearly reached by random regular graphs.
    near(lambda2, 8 - 2 * Math.sqrt(7), 0.15)
  })

  it('says so when it has not converged', () => {
    const attempt = () => algebraicConnectivity(path(400), { method: 'lanczos', maxIterations: 20 })
    expect(attempt).toThrow(NotConvergedError)
    try {
      attempt()
    } catch (error) {
      if (!(error instanceof NotConvergedError)) throw error
      expect(error.code).toBe('not-converged')
      expect(error.iterations).toBe(20)
      expect(error.residual).toBeGreaterThan(error.bound)
    }
  })
})

describe('linkShares', () => {
  it('puts all of λ₂ where the values step: by hand for a path of 3, v = (−1, 0, 1)/√2, λ₂ = 1', () => {
    const shares = linkShares(path(3), Float64Array.of(-1, 0, 1), 1)
    expect(shares).toEqual([
      { source: 0, target: 1, weight: 1, share: 0.5 },
      { source: 1, target: 2, weight: 1, share: 0.5 },
    ])
  })
})

describe('sweepCut', () => {
  /** Every threshold tried in turn. */
  function bySearch(graph: SparseGraph, vector: Float64Array) {
    const degrees = weightedDegrees(graph)
    let ratio = Number.POSITIVE_INFINITY
    let conductance = Number.POSITIVE_INFINITY
    for (const threshold of new Set(vector)) {
      const side = Array.from(vector, (value) => (value > threshold ? 1 : 0))
      const above = side.filter((one) => one === 1).length
      if (above === 0) continue
      const { weight } = crossingOf(graph, side)
      const volumes = [0, 0]
      for (const [i, one] of side.entries()) volumes[one]! += degrees[i]!
      ratio = Math.min(ratio, weight / Math.min(above, graph.nodes - above))
      conductance = Math.min(conductance, weight / Math.min(...volumes))
    }
    return { ratio, conductance }
  }

  it.each([1, 2, 3, 4, 5])('finds the best threshold of a random vector (seed %d)', (seed) => {
    const random = createRandom(seed)
    const base = preferentialAttachment(40, 2, random)
    const graph = fromEdges(
      40,
      edgesOf(base).map(([a, b]) => [a, b, 0.1 + random.uniform()]),
    )
    const vector = Float64Array.from({ length: 40 }, () => Math.floor(random.uniform() * 12))
    const cut = sweepCut(graph, vector)!
    const expected = bySearch(graph, vector)
    for (const kind of ['ratio', 'conductance'] as const) {
      near(cut[kind].value, expected[kind])
      const { side, below, above, links, weight, threshold } = cut[kind]
      expect(crossingOf(graph, side)).toEqual({ links, weight })
      expect(below + above).toBe(40)
      for (const [i, value] of vector.entries()) expect(side[i]).toBe(value > threshold ? 1 : 0)
    }
  })

  it('finds the links between two clusters', () => {
    const graph = twoClusters({ perSide: 20, degree: 6, links: 2 }, createRandom(3))
    const { ratio, conductance } = sweepCut(graph, algebraicConnectivity(graph).fiedler)!
    expect(ratio).toMatchObject({ links: 2, below: 20, above: 20, value: 0.1 })
    near(conductance.value, 2 / (20 * 6 + 2))
  })

  it('finds none where all values are the same', () => {
    expect(sweepCut(star(3), Float64Array.of(1, 1, 1, 1))).toBeNull()
    expect(sweepCut(fromEdges(1, []), Float64Array.of(0))).toBeNull()
  })
})

describe('baselines', () => {
  it('count rounds that grow with n² on rings for power iteration, and with n at most for the Krylov space', () => {
    const rounds = [32, 128].map((nodes) => {
      const graph = ring(nodes)
      const init = { lambda2: algebraicConnectivity(graph).lambda2 }
      const over = (count: (seed: number) => number) =>
        Array.from({ length: 9 }, (_, seed) => count(seed)).sort((a, b) => a - b)[4]!
      return {
        power: over((seed) => synchronousPowerIteration(graph, createRandom(seed), init).rounds),
        krylov: over((seed) => krylovRounds(graph, createRandom(seed), init).rounds),
      }
    })
    expect(rounds[1]!.power / rounds[0]!.power).toBeGreaterThan(6)
    expect(rounds[1]!.krylov / rounds[0]!.krylov).toBeLessThan(6)
  })

  it('count the rounds of power iteration as its eigenvalues say: a path of 3, where I − L/4 multiplies by ¾ and ¼', () => {
    for (const seed of [1, 2, 3, 4, 5]) {
      const start = randomUnit(3, [new Float64Array(3).fill(Math.sqrt(1 / 3))], createRandom(seed))
      // Parts along (−1, 0, 1)/√2 (λ₂ = 1) and (1, −2, 1)/√6 (λ₃ = 3).
      const slow = (start[2]! - start[0]!) ** 2 / 2
      const fast = (start[0]! - 2 * start[1]! + start[2]!) ** 2 / 6
      const estimate = (round: number) => {
        const [left, gone] = [slow * 0.75 ** (2 * round - 2), fast * 0.25 ** (2 * round - 2)]
        return (left + 3 * gone) / (left + gone)
      }
      const expected = Array.from({ length: 40 }, (_, i) => i + 1).find((round) => estimate(round) <= 1.01)!
      const result = synchronousPowerIteration(path(3), createRandom(seed), { lambda2: 1, tolerance: 0.01 })
      expect(result.rounds).toBe(expected)
      near(result.estimate, estimate(expected))
    }
  })

  it('throw when the rounds allowed are too few or λ₂ is not positive', () => {
    const init = { lambda2: algebraicConnectivity(ring(60)).lambda2, maxRounds: 3 }
    expect(() => synchronousPowerIteration(ring(60), createRandom(1), init)).toThrow(NotConvergedError)
    expect(() => krylovRounds(ring(60), createRandom(1), init)).toThrow(NotConvergedError)
    expect(() => krylovRounds(fromEdges(2, []), createRandom(1), { lambda2: 0 })).toThrow(RangeError)
  })
})
