import { describe, expect, it } from 'vitest'
import { linkCount } from '@/lib/method/graph'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import data from './data/closed-forms.json'
import { familyOf } from './families'

const near = (value: number, expected: number, within: number) =>
  expect(Math.abs(value - expected), `${value} is not ${expected}`).toBeLessThan(within)

describe('closed forms of λ₂', () => {
  it('covers every family of the table', () => {
    expect(data.closedForms).toHaveLength(137)
  })

  it.each(data.closedForms)('$graph: $formula', (row) => {
    const { family, numbers } = familyOf(row.graph)
    const graph = family.build(...numbers)
    expect({ nodes: graph.nodes, links: linkCount(graph) }).toEqual({ nodes: row.nodes, links: row.links })
    if (family.lambda2) near(family.lambda2(...numbers), row.lambda2, 1e-12)

    const dense = algebraicConnectivity(graph, { method: 'dense' })
    near(dense.lambda2, row.lambda2, 1e-9)
    expect(dense.multiplicityHint).toBe(row.multiplicity)
    if (row.lambda3 === null) expect(dense.lambda3).toBeNull()
    else near(dense.lambda3!, row.lambda3, 1e-9)

    const sparse = algebraicConnectivity(graph, { method: 'lanczos' })
    near(sparse.lambda2, row.lambda2, 1e-9)
    expect(sparse.multiplicityHint).toBe(Math.min(row.multiplicity, 2))
    if (row.lambda3 !== null) near(sparse.lambda3!, row.lambda3, 1e-9)
  })
})
