import { DEFAULT_SETTINGS, type Estimate } from '@/lib/method/control'
import { edgesOf, fromEdges } from '@/lib/method/graph'
import { twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'

export interface SilentInit {
  disclosure: 'named' | 'sealed'
  /** Share of the agents that fall silent together. */
  silent: number
  /** Their processes end; or they live and walk on, and only their reports are lost. */
  how: 'ended' | 'unheard'
  /** Share of requests lost, half of them on the way there and half on the way back. */
  loss: number
  seed: number
}

export interface SilentCourse {
  /** Share of the time before without a fresh reading, once it had settled: what the losses do alone. */
  withoutBefore: number
  /** Intervals from the silence to a fresh reading of sums taken after it; null where none came. */
  againAfter: number | null
  /** Share of the time of silence without a fresh reading. */
  withoutReading: number
  /** How far fresh readings were off at most while it lasted, and in the mean of its end; null where there were none. */
  worst: number | null
  end: number | null
  /** Intervals from their return to a fresh reading with all of them. */
  backAfter: number | null
  /** In the mean of the end, all of them there. */
  after: number | null
}

const NODES = 60
const SETTLED_MS = 60_000
const BEFORE_MS = 120_000
export const SILENT_MS = 120_000
export const RETURNED_MS = 120_000
/** What is called the end of a stretch. */
const END_MS = 30_000
const PACE = PACES.steady

/** One overlay, of which some fall silent and come back. */
export function silentCourse(init: SilentInit): SilentCourse {
  const { disclosure, silent, how, loss, seed } = init
  const graph = twoClusters({ perSide: NODES / 2, degree: 6, links: 5 }, createRandom(`silent ${seed}`))
  const simulation = new Simulation(
    { random: createRandom(`silent course ${seed}`) },
    {
      nodes: NODES,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: { ...DEFAULT_SETTINGS, pace: PACE, disclosure },
      reportLoss: loss / 2,
      ordersLoss: loss / 2,
      audits: false,
    },
  )
  const looks: Look[] = []
  simulation.onEstimate = (estimate) => looks.push(lookOf(estimate, simulation))
  simulation.run(BEFORE_MS)
  const chosen = chooseFrom(Math.max(1, Math.round(silent * NODES)), seed)
  for (const index of chosen) {
    if (how === 'ended') simulation.stop(index)
    else simulation.agents[index]!.silent = true
  }
  const whileSilent = exactOf(simulation, how === 'ended' ? chosen : [])
  simulation.run(SILENT_MS)
  const wasSilent = looks.filter(({ atMs }) => atMs > BEFORE_MS)
  for (const index of chosen) {
    if (how === 'ended') simulation.start(index)
    else simulation.agents[index]!.silent = false
  }
  const returnedMs = BEFORE_MS + SILENT_MS
  simulation.run(RETURNED_MS)
  const later = looks.filter(({ atMs }) => atMs > returnedMs)
  const exact = algebraicConnectivity(graph).lambda2
  return {
    withoutBefore: shareWithout(looks.filter(({ atMs }) => atMs > SETTLED_MS && atMs <= BEFORE_MS)),
    againAfter: intervalsTo(
      wasSilent.find(({ fresh, takenAtMs }) => fresh !== null && takenAtMs > BEFORE_MS),
      BEFORE_MS,
    ),
    withoutReading: shareWithout(wasSilent),
    worst: worstOff(wasSilent, whileSilent),
    end: meanOff(wasSilent, whileSilent),
    backAfter: intervalsTo(
      later.find(
        ({ fresh, takenAtMs, agents }) => fresh !== null && takenAtMs > returnedMs && agents === NODES,
      ),
      returnedMs,
    ),
    after: meanOff(later, exact),
  }
}

interface Look {
  atMs: number
  /** λ₂ where the reading is fresh. */
  fresh: number | null
  /** Of what moment its sums are, and of how many agents. */
  takenAtMs: number
  agents: number
}

function lookOf(estimate: Estimate, { control }: Simulation): Look {
  const { atMs, lambda2, settling, coverage } = estimate
  const round = control.rounds?.last
  return {
    atMs,
    fresh: settling ? null : lambda2,
    takenAtMs: control.rounds ? (round?.atMs ?? 0) : atMs,
    agents: control.rounds ? (round?.head.agents ?? 0) : coverage.heard,
  }
}

function chooseFrom(count: number, seed: number): number[] {
  const random = createRandom(`silent choice ${seed}`)
  const lots = Array.from({ length: NODES }, (_, index) => ({ index, lot: random.uniform() }))
  return lots
    .sort((a, b) => a.lot - b.lot)
    .slice(0, count)
    .map(({ index }) => index)
}

/** Without the agents that ended, whose neighbours keep their links to each other. */
function exactOf(simulation: Simulation, ended: readonly number[]): number {
  const rest = simulation.agents.flatMap((_, index) => (ended.includes(index) ? [] : [index]))
  const place = new Map(rest.map((index, at) => [index, at]))
  const links = simulation
    .liveLinks()
    .map(({ a, b, weight }): [number, number, number] => [place.get(a)!, place.get(b)!, weight])
  return algebraicConnectivity(fromEdges(rest.length, links)).lambda2
}

const shareWithout = (looks: readonly Look[]): number =>
  looks.filter(({ fresh }) => fresh === null).length / looks.length

const intervalsTo = (look: Look | undefined, fromMs: number): number | null =>
  look ? Math.ceil((look.atMs - fromMs) / PACE.intervalMs) : null

const offs = (looks: readonly Look[], exact: number): number[] =>
  looks.flatMap(({ fresh }) => (fresh === null ? [] : [fresh / exact - 1]))

function worstOff(looks: readonly Look[], exact: number): number | null {
  const [worst] = offs(looks, exact).sort((a, b) => Math.abs(b) - Math.abs(a))
  return worst ?? null
}

function meanOff(looks: readonly Look[], exact: number): number | null {
  const endMs = looks.at(-1)!.atMs - END_MS
  const all = offs(
    looks.filter(({ atMs }) => atMs > endMs),
    exact,
  )
  return all.length === 0 ? null : all.reduce((sum, off) => sum + off, 0) / all.length
}
