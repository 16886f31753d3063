import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import type { WarnFacts } from '@/lib/warn/facts'
import { median } from '@/lib/warn/stats/median'
import { HealthyLife } from './healthy-life'
import type { NoiseModel } from './noise'
import type { ThinningOverlay } from './overlays'
import { SAMPLE_MS } from './sampling'
import { BareOverlay, SurrogateReading } from './surrogate'

const MINUTE_MS = 60_000
const PER_MINUTE = MINUTE_MS / SAMPLE_MS
/** What is usual is of so many days of the overlay's own life. */
const USUAL_DAYS = 7

const NO_NOISE: NoiseModel = {
  lagSamples: 0,
  phi: 0,
  spread: 0,
  settlingSamples: 0,
  freshAtRest: 1,
  walkerHours: 0,
}

interface CourseInit {
  noise: NoiseModel
  seed: string
  startHour?: number
}

/** What is usual of healthy life on this graph, read without noise. */
export function usualOf(graph: SparseGraph): number {
  return new Course(graph, edgesOf(graph), { noise: NO_NOISE, seed: 'usual' }).usual()
}

/** Healthy days as the surrogate reads them. */
export function healthyDays(graph: SparseGraph, days: number, { noise, seed }: CourseInit): WarnFacts[] {
  const course = new Course(graph, edgesOf(graph), { noise, seed, startHour: 0 })
  const usual = course.usual()
  return course.minutes(days * 1440, usual)
}

export interface Thinning {
  facts: WarnFacts[]
  beganAtMs: number
  oneLeftAtMs: number
  lastGoneAtMs: number
}

/** A day of health, then the links between the clusters go one by one, evenly, in random order; life goes on meanwhile. */
export function thinning(
  { graph, firstOfOther }: ThinningOverlay,
  hours: number,
  { noise, seed }: CourseInit,
): Thinning {
  const random = createRandom(`thinning ${seed}`)
  const crosses = ([a, b]: readonly number[]): boolean => a! < firstOfOther !== b! < firstOfOther
  const links = edgesOf(graph)
  const order = links
    .filter(crosses)
    .map((link) => ({ link, at: random.uniform() }))
    .sort((one, other) => one.at - other.at)
    .map(({ link }) => link)
  const startHour = random.uniform() * 24
  // What is usual is of whole days, whatever the hour.
  const usual = new Course(graph, links, { noise, seed, startHour }).usual()
  const course = new Course(
    graph,
    links.filter((link) => !crosses(link)),
    { noise, seed, startHour },
  )
  const facts = course.minutes(1440, usual)
  const beganAtMs = course.nowMs
  const gone = order.map((_, index) => beganAtMs + (hours * 60 * MINUTE_MS * (index + 1)) / order.length)
  for (const [index, [a, b]] of order.entries()) {
    facts.push(...course.minutes(Math.round((gone[index]! - course.nowMs) / MINUTE_MS), usual))
    course.overlay.cut(a, b)
  }
  facts.push(...course.minutes(20, usual))
  return { facts, beganAtMs, oneLeftAtMs: gone[gone.length - 2]!, lastGoneAtMs: gone[gone.length - 1]! }
}

class Course {
  nowMs = 0
  readonly overlay: BareOverlay
  readonly #life: HealthyLife
  readonly #reading: SurrogateReading

  constructor(
    graph: SparseGraph,
    living: readonly (readonly [number, number, number])[],
    { noise, seed, startHour = 0 }: CourseInit,
  ) {
    this.overlay = new BareOverlay(graph)
    const links = living.map(([a, b]) => ({ a, b }))
    this.#life = new HealthyLife(
      { random: createRandom(`days ${seed}`) },
      { nodes: graph.nodes, links, startHour },
    )
    this.#reading = new SurrogateReading({ random: createRandom(`noise ${seed}`) }, noise)
  }

  usual(): number {
    return median(this.minutes(USUAL_DAYS * 1440, null).map(({ lambda2 }) => lambda2 ?? 0))
  }

  minutes(count: number, usual: number | null): WarnFacts[] {
    return Array.from({ length: count }, () => {
      this.#life.minute(this.overlay)
      return Array.from({ length: PER_MINUTE }, () => {
        this.nowMs += SAMPLE_MS
        return this.#reading.next(this.overlay, { atMs: this.nowMs, usual })
      })
    }).flat()
  }
}
