import { describe, expect, it } from 'vitest'
import {
  type JudgedAgent,
  type JudgeInput,
  type Judgement,
  judge,
  LISTENING_INTERVALS,
} from '@/lib/collector/judge'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import { sideOf } from '@/lib/collector/sides'
import type { CutCount, Estimate } from '@/lib/method/control'

const INTERVAL_MS = 2_000
const START_MS = Date.UTC(2031, 4, 6, 12)

const CUT: CutCount = { threshold: 0, sweep: 7, above: 4, below: 4, links: 6, weight: 6 }

/** Four nodes in Tarnwick with values below 0, four in Eelholm above; tar-00 joined first. */
function agents(
  change: (agent: JudgedAgent, index: number) => Partial<JudgedAgent> = () => ({}),
): JudgedAgent[] {
  return Array.from({ length: 8 }, (_, index) => {
    const agent: JudgedAgent = {
      agentId: `agent-${index}`,
      name: `${index < 4 ? 'tar' : 'eel'}-0${index}`,
      labels: { harbour: index < 4 ? 'Tarnwick' : 'Eelholm' },
      joinedAtMs: index,
      heard: true,
      heardAtMs: START_MS,
      attached: true,
      value: { sweep: 7, value: index < 4 ? -1 : 1 },
    }
    return { ...agent, ...change(agent, index) }
  })
}

function estimate(over: Partial<Estimate> = {}, heard = 8): Estimate {
  return {
    atMs: START_MS,
    withheld: null,
    lambda2: 0.6,
    low: 0.59,
    high: 0.61,
    lambda3AtMost: 2,
    crossCheck: 0.61,
    settling: false,
    settlesInMs: null,
    answersInMs: null,
    singleCut: true,
    cut: CUT,
    coverage: {
      joined: 8,
      heard,
      prompt: heard,
      attached: heard,
      meanWeightedDegree: 4,
      linksMeasured: 16,
      linksKnown: 16,
      walkersHeard: heard / 8,
    },
    seedings: [1, 2],
    ...over,
  }
}

const withheld: Partial<Estimate> = {
  withheld: 'unheard',
  lambda2: null,
  low: null,
  high: null,
  lambda3AtMost: null,
  singleCut: null,
  cut: null,
}

/** Judges one interval after the other, as a leader does. */
class Course {
  memory: Memory = BLANK_MEMORY
  atMs = START_MS

  next(over: Partial<Estimate> = {}, given: Partial<JudgeInput> = {}, heard = 8): Judgement {
    this.atMs += INTERVAL_MS
    const judgement = judge({
      estimate: estimate({ ...over, atMs: over.atMs ?? this.atMs }, heard),
      agents: agents(),
      memory: this.memory,
      combination: 7,
      meanWeightedDegree: 4,
      usual: null,
      intervalMs: INTERVAL_MS,
      ...given,
    })
    this.memory = judgement.memory
    return judgement
  }

  run(count: number): Judgement {
    let last = this.next()
    for (let index = 1; index < count; index++) last = this.next()
    return last
  }
}

const eelSilent = (atMs: number): JudgedAgent[] =>
  agents((_, index) => (index < 4 ? {} : { heard: false, heardAtMs: atMs }))

describe('a judgement', () => {
  it('remembers the usual for whoever leads next', () => {
    const course = new Course()
    expect(course.next({}, { usual: 0.66 }).memory.usual).toBe(0.66)
    expect(course.next({}, { usual: null }).memory.usual).toBeNull()
  })

  it('of a fresh reading gives level, sides by overlap with the eldest on a, and what the cut follows', () => {
    const { reading, events } = new Course().next()
    expect(reading).toMatchObject({
      lambda2: 0.6,
      level: 'firm',
      trend: null,
      data: 'fresh',
      verdict: 'Firm. The thinnest cut found parts 4 nodes from 4 and holds on 6 links.',
      detail: 'It follows the label harbour: Tarnwick on one side, Eelholm on the other.',
      sides: [
        { name: 'a', nodes: 4 },
        { name: 'b', nodes: 4 },
      ],
      crossingLinks: 6,
      last: null,
    })
    expect(events).toEqual([{ kind: 'level-changed', text: 'First judged firm' }])
  })

  it('keeps the names of the sides when the vector comes back with the other sign', () => {
    const course = new Course()
    course.next()
    course.next({ cut: null }, { combination: null })
    const flipped = agents(({ value }) => ({ value: { sweep: 40, value: -value!.value } }))
    course.next({ cut: { ...CUT, sweep: 40, above: 5, below: 3 } }, { agents: flipped, combination: 40 })
    expect(course.memory.sides['agent-0']).toBe('a')
    expect(course.memory.cut?.nodes).toEqual({ a: 5, b: 3 })
  })

  it('tells of the next best cut by the same sides, and of none where no single cut stands out', () => {
    const runnerUp = { threshold: 1.1, above: 2, below: 6, links: 9, weight: 8.5 }
    const course = new Course()
    expect(course.next({ cut: { ...CUT, runnerUp } }).reading.runnerUp).toEqual({
      sides: [6, 2],
      links: 9,
      weight: 8.5,
    })
    expect(course.next({ singleCut: false }).reading.runnerUp).toBeUndefined()
  })

  it('does not put nodes on sides by values of before a change of sign', () => {
    const course = new Course()
    course.next({ cut: null }, { combination: null })
    course.next({ cut: { ...CUT, sweep: 41 } }, { combination: 40 })
    expect(course.memory.cut).toBeNull()
  })

  describe('of an overlay whose nodes do not tell their sides', () => {
    const CUT_6_2 = { ...CUT, above: 6, below: 2 }
    const sizes = [
      { name: 'a', nodes: 6 },
      { name: 'b', nodes: 2 },
    ]
    const untold = (change: (agent: JudgedAgent, index: number) => Partial<JudgedAgent> = () => ({})) => ({
      isNamed: false,
      agents: agents((agent, index) => ({ value: null, ...change(agent, index) })),
    })
    const cutOf = (sweep: number) => ({ cut: { ...CUT_6_2, sweep } })
    const told = (sweep: number) => ({
      isNamed: false,
      agents: agents(({ value }) => ({ value: value && { ...value, sweep } })),
    })

    it('counts the cut, puts nobody on a side, and keeps the names of its sides when they tell', () => {
      const course = new Course()
      const { reading } = course.next(cutOf(7), untold())
      expect(reading).toMatchObject({ sides: sizes, crossingLinks: 6, detail: '' })
      expect(reading.verdict).toContain('6 nodes')
      expect(sideOf(course.memory, 'agent-0')).toBeNull()
      course.next(cutOf(8), told(8))
      expect([sideOf(course.memory, 'agent-0'), sideOf(course.memory, 'agent-7')]).toEqual(['b', 'a'])
      expect(course.next(cutOf(9), untold()).reading.sides).toEqual(sizes)
      expect(sideOf(course.memory, 'agent-0')).toBeNull()
      course.next(cutOf(10), told(10))
      expect(sideOf(course.memory, 'agent-0')).toBe('b')
    })

    it('does not take two that are silent for a side of their own', () => {
      const course = new Course()
      course.next(cutOf(7), told(7))
      const silent = () =>
        untold((_, index) => (index < 2 ? { heard: false, heardAtMs: START_MS, labels: {} } : {}))
      for (let sweep = 8; sweep < 8 + 2 * LISTENING_INTERVALS; sweep++)
        expect(course.next(cutOf(sweep), silent(), 6).reading.treatAsSplit).toBe(false)
    })

    it('says that it is not known whether the silent lie beyond the cut', () => {
      const course = new Course()
      course.next(cutOf(7), untold())
      const silent = untold((_, index) => ({
        labels: {},
        ...(index < 4 && { heard: false, heardAtMs: START_MS }),
      }))
      let last = course.next(withheld, silent, 4)
      for (let index = 0; index < LISTENING_INTERVALS; index++) last = course.next(withheld, silent, 4)
      expect(last.reading.detail).toContain('no node had told its side of the cut')
    })
  })

  it('withholds sides and crossing links where no single cut is weakest, until one stands out clearly', () => {
    const course = new Course()
    course.next()
    const several = course.next({ singleCut: false, lambda3AtMost: 0.7 }).reading
    expect([several.sides, several.crossingLinks, several.singleCut]).toEqual([null, null, false])
    expect(course.next({ singleCut: true, lambda3AtMost: 0.75 }).reading.sides).toBeNull()
    expect(course.next({ singleCut: true, lambda3AtMost: 0.8 }).reading.sides).not.toBeNull()
  })

  it('stays with the last level while settling, unless it gets worse', () => {
    const course = new Course()
    course.next({ cut: { ...CUT, links: 3 } })
    const better = course.next({ settling: true, cut: { ...CUT, sweep: 8, links: 9 } }, { combination: 7 })
    expect([better.reading.level, better.reading.data]).toEqual(['weak', 'settling'])
    const worse = course.next({ settling: true, cut: { ...CUT, sweep: 9, links: 0 } })
    expect(worse.reading.level).toBe('split')
    expect(course.next({ cut: { ...CUT, sweep: 10, links: 9 } }).reading.level).toBe('firm')
  })

  it('gives no level before the first settled reading', () => {
    const course = new Course()
    const { reading } = course.next({ settling: true, cut: { ...CUT, links: 2 } })
    expect([reading.level, reading.verdict]).toEqual([null, 'The first reading is settling.'])
  })

  it('treats a side that falls silent as split, withholds, and says the last good value', () => {
    const course = new Course()
    course.run(20)
    const lastAt = course.atMs
    const { reading, events } = course.next(withheld, { agents: eelSilent(lastAt) }, 4)
    expect(reading).toMatchObject({
      lambda2: null,
      level: 'split',
      data: 'unheard',
      treatAsSplit: true,
      verdict: 'Treat as split. 4 nodes are unheard, all beyond the last weak cut.',
      sides: [
        { name: 'a', nodes: 4 },
        { name: 'b', nodes: 4 },
      ],
      last: { at: new Date(lastAt).toISOString(), lambda2: 0.6 },
    })
    expect(reading.detail).toContain('Eelholm fell silent together.')
    expect(events.map(({ kind, text }) => `${kind}: ${text}`)).toEqual([
      'agent-unheard: 4 nodes are unheard',
      'withheld: Reading withheld: 4 of 8 agents heard in time',
      'level-changed: Treat as split: agents fell silent together',
    ])
  })

  it('stays split when some come back, until a fresh reading says otherwise', () => {
    const course = new Course()
    course.run(20)
    course.next(withheld, { agents: eelSilent(course.atMs) }, 4)
    const some = agents((_, index) => (index < 6 ? {} : { heard: false, heardAtMs: course.atMs }))
    expect(course.next(withheld, { agents: some }, 6).reading.level).toBe('split')
    expect(course.next({ settling: true }).reading.level).toBe('split')
    const { reading, events } = course.next()
    expect(reading.level).toBe('firm')
    expect(events).toEqual([{ kind: 'level-changed', text: 'From split to firm' }])
  })

  it('makes nothing new of silence after a pause in its own listening', () => {
    const course = new Course()
    course.run(20)
    const lastAt = course.atMs
    course.atMs += 60_000
    const silent = eelSilent(lastAt)
    const levels = Array.from(
      { length: 11 },
      () => course.next(withheld, { agents: silent }, 4).reading.level,
    )
    expect(levels).toEqual([...Array.from({ length: 10 }, () => 'firm'), 'split'])
  })

  it('stores every reading, but of an unchanged withheld one only every tenth', () => {
    const course = new Course()
    course.run(20)
    const silent = eelSilent(course.atMs)
    const stored = Array.from({ length: 21 }, () => course.next(withheld, { agents: silent }, 4).store)
    expect(stored.map((store, index) => (store ? index : -1)).filter((index) => index >= 0)).toEqual([
      0, 10, 20,
    ])
  })

  it('of agents that never reported waits for them, and calls it settling', () => {
    const never = agents(() => ({ heard: false, heardAtMs: null, value: null, attached: false }))
    const { reading } = new Course().next(withheld, { agents: never, combination: null }, 0)
    expect([reading.data, reading.level, reading.verdict]).toEqual([
      'settling',
      null,
      'Waiting to hear 8 agents of 8 for the first time.',
    ])
  })

  it('tells a falling trend from twenty fresh readings on', () => {
    const course = new Course()
    const trends = Array.from({ length: 30 }, (_, index) => {
      const lambda2 = 0.6 * 0.97 ** index
      return course.next({ lambda2, low: lambda2 - 0.01, high: lambda2 + 0.01 }).reading.trend
    })
    expect([trends[18], trends[19], trends[29]]).toEqual([null, 'falling', 'falling'])
  })
})
