import { describe, expect, it } from 'vitest'
import {
  firstWave,
  MOST_TRIES,
  nextWave,
  type WaveNode,
  wavesSentence,
} from '@/lib/collector/rehearsal/waves'
import type { RehearsalPlan } from '@/lib/data/rehearsal-dto'

const nodeOf = (name: string, office: string, value: number): WaveNode => ({
  name,
  labels: { office, serial: `no. ${name}` },
  value,
})
const EIGHT = [
  ...['tar-01', 'tar-02', 'tar-03', 'tar-04'].map((name, at) => nodeOf(name, 'Tarnwick', 1 + at / 10)),
  ...['eel-01', 'eel-02', 'eel-03', 'eel-04'].map((name, at) => nodeOf(name, 'Eelholm', -1 - at / 10)),
]
const reading = { lambda2: 0.4, low: 0.39, high: 0.41 }

/** Every wave is asked whether it holds, until there is an end. */
function search(nodes: readonly WaveNode[], holds: (wave: readonly string[]) => boolean) {
  let plan: RehearsalPlan = firstWave(nodes)
  const tried: string[][] = []
  for (;;) {
    tried.push(plan.tried)
    const next = nextWave(plan, holds(plan.tried) ? { holds: reading } : 'does-not-hold')
    if ('end' in next) return { tried, end: next.end }
    plan = next.plan
  }
}

describe('an order in waves', () => {
  it('begins with half of them, spread over labels and over values within a label', () => {
    expect(firstWave(EIGHT)).toEqual({
      held: [],
      left: ['eel-04', 'eel-03', 'eel-02', 'eel-01', 'tar-01', 'tar-02', 'tar-03', 'tar-04'],
      tried: ['eel-03', 'eel-01', 'tar-02', 'tar-04'],
      tries: 1,
    })
  })

  it('takes what is left next where half of them hold', () => {
    const { tried, end } = search(EIGHT, () => true)
    expect(tried).toEqual([
      ['eel-03', 'eel-01', 'tar-02', 'tar-04'],
      ['eel-04', 'eel-02', 'tar-01', 'tar-03'],
    ])
    expect(end).toEqual({
      waves: [
        { nodes: ['eel-01', 'eel-03', 'tar-02', 'tar-04'], ...reading },
        { nodes: ['eel-02', 'eel-04', 'tar-01', 'tar-03'], ...reading },
      ],
    })
    expect(wavesSentence(end)).toBe('It holds in 2 waves, of 4 and 4 nodes, one after the other.')
  })

  it('halves what does not hold, and has every node in exactly one wave that does', () => {
    const holds = (wave: readonly string[]) => wave.filter((name) => name.startsWith('tar')).length <= 1
    const { end } = search(EIGHT, holds)
    const waves = end.waves?.map(({ nodes }) => nodes) ?? []
    expect(waves.every(holds)).toBe(true)
    expect(waves.flat().sort()).toEqual(EIGHT.map(({ name }) => name).sort())
  })

  it('ends where one node may not go even by itself, and says which', () => {
    const { end } = search(EIGHT.slice(0, 2), () => false)
    expect(end).toEqual({ waves: null, because: 'alone', node: 'tar-02' })
    expect(wavesSentence(end)).toBe('No order in waves was found: not even tar-02 may go by itself.')
  })

  it('ends after so many tries, and where a wave comes to no answer', () => {
    const many = Array.from({ length: 60 }, (_, at) => nodeOf(`tar-${at}`, 'Tarnwick', at))
    const { tried, end } = search(many, (wave) => wave.length === 1)
    expect([tried.length, end]).toEqual([MOST_TRIES, { waves: null, because: 'tries' }])
    const lost = nextWave(firstWave(EIGHT), 'no-answer')
    expect(lost).toEqual({ end: { waves: null, because: 'no-answer' } })
  })
})
