import { describe, expect, it } from 'vitest'
import { becauseOfComplaint } from '@/lib/collector/audit/because'
import { upheld } from '@/lib/collector/audit/complaints'
import { wrongAlone } from '@/lib/collector/audit/report-figures'
import { verdictOf } from '@/lib/collector/verdict'
import { addBirths, birthsOff, noBirths } from '@/lib/method/audit'
import { deviationsOut } from '@/lib/method/audit/arrivals'
import type { Complaint, Sums } from '@/lib/method/report'

const complaint = (peer: string, ratio = 5): Complaint => ({ peer, fault: 'mean', ratio })
const quiet = { complaints: [], degree: 6 }

describe('complaints', () => {
  it('are upheld when two neighbours make them, at the median ratio', () => {
    const agents = [
      { agentId: 'tar-01', complaints: [complaint('gul-04', 4.9)], degree: 6 },
      { agentId: 'pin-02', complaints: [complaint('gul-04', 5.1)], degree: 6 },
      { agentId: 'gul-04', ...quiet },
    ]
    expect(upheld(agents)).toEqual([{ agentId: 'gul-04', fault: 'mean', ratio: 5.1, accusers: 2 }])
  })

  it('of one neighbour count only where that is a third of all', () => {
    const accuser = { agentId: 'tar-01', complaints: [complaint('gul-04')], degree: 6 }
    expect(upheld([accuser, { agentId: 'gul-04', complaints: [], degree: 4 }])).toEqual([])
    expect(upheld([accuser, { agentId: 'gul-04', complaints: [], degree: 3 }])).toHaveLength(1)
  })

  it('of an agent that accuses most of its neighbours count for nothing', () => {
    const peers = ['gul-04', 'pin-02', 'eel-09']
    const accuser = { agentId: 'tar-01', complaints: peers.map((peer) => complaint(peer)), degree: 5 }
    const accused = peers.map((agentId) => ({ agentId, complaints: [], degree: 1 }))
    expect(upheld([accuser, ...accused])).toEqual([])
  })
})

describe('one report by itself', () => {
  const counters = {
    seeded: 400,
    births: 10,
    kills: 8,
    culls: 2,
    dropped: 0,
    sent: 100,
    received: 90,
    walkerTime: 4096,
    occupancyX: 3000,
    occupancyY: 1000,
    linkTime: 10,
  }
  const sums: Sums = {
    attached: 1,
    colonies: [{ colony: 0, seeding: 7, present: 1, counters, heldX: 300, heldY: 90, mean: 215_040 }],
    energies: [2_048],
    moments: [45_158_400],
    linkEnds: 3,
    linkEndWeight: 3_072,
    sweep: null,
  }
  const anySeeds = () => 400

  it('stands when its walkers, moments and energies add up', () => {
    expect(wrongAlone(sums, anySeeds)).toBeNull()
  })

  it.each([
    ['identity', { ...sums, colonies: [{ ...sums.colonies[0]!, heldX: 301 }] }],
    ['moments', { ...sums, moments: [45_158_700] }],
    ['energies', { ...sums, energies: [-3] }],
  ] as const)('falls by its %s', (wrong, bent) => {
    expect(wrongAlone(bent, anySeeds)).toBe(wrong)
  })

  it('falls when it placed more walkers than it was told', () => {
    expect(wrongAlone(sums, () => 200)).toBe('seeded')
  })
})

describe('births', () => {
  const claimed = (births: number, culls: number) => {
    const claim = noBirths()
    addBirths(claim, { births, culls }, [{ x: 0.4, y: -0.2 }], 0.5, 1_000)
    return birthsOff(claim)
  }

  it('less culls stand within the rates of both types, though these differ in sign', () => {
    expect(claimed(200, 100)).toBe(1)
    expect(claimed(180, 130)).toBe(1)
  })

  it('are too many or too few beyond chance', () => {
    expect(claimed(800, 100)).toBeGreaterThan(2)
    expect(claimed(100, 500)).toBeLessThan(0)
  })
})

describe('χ² as standard deviations', () => {
  // Abramowitz and Stegun, table 26.8: χ² with 5 degrees of freedom exceeds 20.515 with probability 0.001; from memory.
  it('agrees with the table of percentage points', () => {
    expect(deviationsOut(20.515, 5)).toBeCloseTo(3.09, 1)
    expect(deviationsOut(4.351, 5)).toBeCloseTo(0, 1)
  })
})

it('says in the verdict who is left out, and why', () => {
  const { detail } = verdictOf({
    state: 'reading',
    joined: 35,
    heard: 35,
    late: 0,
    neverHeard: 0,
    detached: 0,
    level: 'firm',
    rule: null,
    trend: 'steady',
    treatAsSplit: null,
    singleCut: false,
    cut: null,
    follows: null,
    shareOfUsual: null,
    leftOut: [{ name: 'gul-04', because: becauseOfComplaint('mean', 4.97) }],
  })
  expect(detail).toContain(
    'gul-04 is left out: its neighbours counted 5 times fewer walkers than it declares.',
  )
})
