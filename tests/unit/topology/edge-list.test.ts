import { describe, expect, it } from 'vitest'
import { fromGraphology } from '@/lib/method/graph'
import { describeTopologyProblem, parseEdgeList, parseNodeList } from '@/lib/topology'

function problems(result: ReturnType<typeof parseEdgeList> | ReturnType<typeof parseNodeList>) {
  if (result.ok) throw new Error('expected problems')
  return result.problems
}

describe('parseEdgeList', () => {
  it.each([
    ['with a header', 'source,target,weight\ntar-01,gul-04,0.5\ngul-04,pin-02,\n'],
    ['without one', 'tar-01,gul-04,0.5\ngul-04,pin-02\n'],
    [
      'with blank lines, spaces, CRLF and a byte-order mark',
      '\uFEFF\r\n tar-01 , gul-04 ,5e-1\r\n\r\n"gul-04",pin-02,1',
    ],
  ])('reads links %s', (_, text) => {
    const result = parseEdgeList(text)
    if (!result.ok) throw new Error(JSON.stringify(result.problems))
    const { graph, names } = fromGraphology(result.graph)
    expect(names).toEqual(['tar-01', 'gul-04', 'pin-02'])
    expect([...graph.offsets]).toEqual([0, 1, 3, 4])
    expect([...graph.targets]).toEqual([1, 0, 2, 1])
    expect([...graph.weights]).toEqual([0.5, 0.5, 1, 1])
  })

  it('reports every bad line by its number', () => {
    const text = [
      'source,target,weight',
      'tar-01,tar-01',
      'tar-01,gul-04,0',
      'tar-01,gul-04,1.01',
      'tar-01,gul-04,0x1',
      'tar-01,gul-04,much',
      ',gul-04',
      'tar-01',
      'a,b,1,x',
      'tar-01,gul-04,1',
      '',
      'gul-04,tar-01',
      `${'n'.repeat(121)},gul-04`,
      'tar-01,gul-04,-0.5',
    ].join('\n')
    expect(problems(parseEdgeList(text))).toEqual([
      { line: 2, code: 'self-loop', name: 'tar-01' },
      { line: 3, code: 'bad-weight', weight: '0' },
      { line: 4, code: 'bad-weight', weight: '1.01' },
      { line: 5, code: 'bad-weight', weight: '0x1' },
      { line: 6, code: 'bad-weight', weight: 'much' },
      { line: 7, code: 'missing-name', column: 'source' },
      { line: 8, code: 'wrong-columns', found: 1, expected: 'source,target or source,target,weight' },
      { line: 9, code: 'wrong-columns', found: 4, expected: 'source,target or source,target,weight' },
      { line: 12, code: 'duplicate-link', source: 'gul-04', target: 'tar-01', firstLine: 10 },
      { line: 13, code: 'bad-name', name: 'n'.repeat(121) },
      { line: 14, code: 'bad-weight', weight: '-0.5' },
    ])
  })

  it('counts lines across a quoted line break, and refuses it in a name', () => {
    expect(problems(parseEdgeList('"tar\n01",gul-04\npin-02,pin-02\n'))).toEqual([
      { line: 1, code: 'bad-name', name: 'tar\n01' },
      { line: 3, code: 'self-loop', name: 'pin-02' },
    ])
  })

  it('says that an open quote is not CSV', () => {
    expect(
      problems(parseEdgeList('tar-01,gul-04\n"tar-01,pin-02')).map(({ line, code }) => [line, code]),
    ).toEqual([[2, 'malformed-csv']])
  })

  it.each(['', '\n\n', 'source,target\n'])('asks for links where there are none: %j', (text) => {
    expect(problems(parseEdgeList(text))).toEqual([{ line: 1, code: 'no-links' }])
  })

  it('does not mix up names that look alike when joined', () => {
    const result = parseEdgeList('a b,c\na,b c\n')
    expect(result.ok && result.graph.size).toBe(2)
  })

  it('refuses names that every object has', () => {
    expect(problems(parseEdgeList('__proto__,constructor\n')).map(({ code }) => code)).toEqual([
      'bad-name',
      'bad-name',
    ])
  })
})

describe('parseNodeList', () => {
  it('reads labels, leaving out empty ones', () => {
    const result = parseNodeList('name,office,rack\ntar-01,Tarnwick,1\ngul-04,Gullhythe,\npin-02\n')
    expect(result).toEqual({
      ok: true,
      nodes: new Map([
        ['tar-01', { office: 'Tarnwick', rack: '1' }],
        ['gul-04', { office: 'Gullhythe' }],
        ['pin-02', {}],
      ]),
    })
  })

  it('wants a header', () => {
    expect(problems(parseNodeList('tar-01,Tarnwick\n'))).toEqual([{ line: 1, code: 'missing-header' }])
    expect(problems(parseNodeList(''))).toEqual([{ line: 1, code: 'missing-header' }])
  })

  it('reports every bad line by its number', () => {
    const text = 'name,office,office,1st\ntar-01,a,b,c\ntar-01\n,x\ngul-04,a,b,c,d\n'
    expect(problems(parseNodeList(text))).toEqual([
      { line: 1, code: 'duplicate-label-key', key: 'office' },
      { line: 1, code: 'bad-label-key', key: '1st' },
      { line: 3, code: 'duplicate-node', name: 'tar-01', firstLine: 2 },
      { line: 4, code: 'missing-name', column: 'name' },
      { line: 5, code: 'wrong-columns', found: 5, expected: 'at most 4, as in the header' },
    ])
  })
})

describe('describeTopologyProblem', () => {
  it('says where, what and what to do', () => {
    expect(
      describeTopologyProblem({
        line: 12,
        code: 'duplicate-link',
        source: 'gul-04',
        target: 'tar-01',
        firstLine: 10,
      }),
    ).toBe('Line 12: gul-04 – tar-01 is already on line 10; links have no direction, so keep one of the two.')
    expect(describeTopologyProblem({ line: 8, code: 'wrong-columns', found: 1, expected: 'x' })).toBe(
      'Line 8: has 1 column; expected x.',
    )
  })
})
