import type { Reading } from '@/lib/data/dto'
import { isHeard } from '@/lib/method/control'
import { linkCount } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import type { Reckoner } from '@/lib/reckon'
import { namedGraph } from '@/lib/reinforce/known'
import type { Loaded } from './leader-load'

export type Exact = NonNullable<Reading['exact']>

/** So often at most; the thread is shared with whoever asks for new links. */
export const EXACT_EVERY_MS = 60_000
/** An older one is not shown any more. */
const SHOWN_FOR_MS = 3 * EXACT_EVERY_MS
export const EXACT_MOST_NODES = 5_000
export const EXACT_MOST_LINKS = 50_000
/** Half the interval is noise that one reading in ten exceeds; thrice that is none, nor is what a reading lags by. */
const HALVES = 3
const WITHIN = 0.05

/** The exact λ₂ of the links that agents name, beside the reading from walkers: each watches over the other. */
export class ExactCheck {
  readonly #reckon: Pick<Reckoner, 'reckon'>['reckon']
  #latest: Exact | null = null
  #beganAtMs = Number.NEGATIVE_INFINITY
  #running = false

  constructor(components: { reckon: Pick<Reckoner, 'reckon'>['reckon'] }) {
    this.#reckon = components.reckon
  }

  latest(atMs: number): Exact | null {
    return this.#latest && atMs - Date.parse(this.#latest.at) <= SHOWN_FOR_MS ? this.#latest : null
  }

  /** Begins anew where it is time. Settles when there is an answer; what the thread cannot answer is not shown. */
  async look({ snapshot, pace, disclosure }: Loaded, reading: Reading): Promise<void> {
    const { atMs } = snapshot
    if (disclosure !== 'named') {
      this.#latest = null
      return
    }
    if (this.#running || atMs - this.#beganAtMs < EXACT_EVERY_MS) return
    const { intervalMs } = PACES[pace]
    const agents = snapshot.agents.flatMap((agent) => {
      const report = isHeard(agent, atMs, intervalMs) ? agent.last.report : null
      return report?.sums.attached === 1 ? [{ agentId: agent.agentId, facts: report.node }] : []
    })
    const { graph, oneEnd } = namedGraph(agents)
    const links = linkCount(graph)
    if (links === 0 || graph.nodes > EXACT_MOST_NODES || links > EXACT_MOST_LINKS) return
    this.#beganAtMs = atMs
    this.#running = true
    try {
      const { lambda2 } = await this.#reckon('connectivity', { graph })
      const compared = compare(lambda2, reading)
      // Links and walkers may have been told of at different moments: once is no proof.
      const check = compared === 'apart' && !isDoubted(this.#latest) ? 'unsure' : compared
      this.#latest = { at: reading.at, lambda2, links, oneEnd, reading: reading.lambda2, check }
    } finally {
      this.#running = false
    }
  }
}

/** The last one was apart as well. */
function isDoubted(last: Exact | null): boolean {
  if (!last || last.reading === null) return false
  return last.check === 'apart' || Math.abs(last.lambda2 - last.reading) > WITHIN * last.lambda2
}

export function compare(
  exact: number,
  { lambda2, low, high, data, level }: Pick<Reading, 'lambda2' | 'low' | 'high' | 'data' | 'level'>,
): Exact['check'] {
  if (lambda2 === null || data !== 'fresh') return 'unsure'
  // Once split a reading is as good as zero, and so is what its interval says.
  if (exact === 0) return level === 'split' ? 'agrees' : 'apart'
  const half = low === null || high === null ? 0 : (high - low) / 2
  return Math.abs(exact - lambda2) <= Math.max(HALVES * half, WITHIN * exact) ? 'agrees' : 'apart'
}
