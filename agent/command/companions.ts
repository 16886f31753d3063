import type { Pace } from '@/lib/method/pace'
import type { Agent } from '../agent'
import type { Post } from '../collector/post'
import { createSource, Neighbourhood, type NeighbourhoodFacts, readRule } from '../sources'
import { ServiceNotice, TickWatch, type WatchFacts, WatchServer } from '../watch'
import type { CommandComponents } from './components'
import type { Settings } from './settings'

export interface CompanionsInit {
  settings: Settings
  post: Post
  agent: Agent
  pace: Pace
}

/** What runs beside the agent: the source of its neighbours, the metrics port, the signs of life. */
export class Companions {
  private readonly components: CommandComponents
  private readonly init: CompanionsInit
  private readonly neighbourhood: Neighbourhood | null
  private readonly watch: WatchServer | null
  private readonly notice: ServiceNotice | null
  private readonly startedAtMs: number
  private facts: NeighbourhoodFacts | null = null

  constructor(components: CommandComponents, init: CompanionsInit) {
    const { clock, logger, runProgram, notify } = components
    const { agent, settings } = init
    this.components = components
    this.init = init
    this.startedAtMs = clock.monotonicMs()
    this.neighbourhood = this.createNeighbourhood()
    const ticks = new TickWatch({ clock, ticks: () => agent.status().ticks.count })
    const tickAgeMs = () => ticks.ageMs()
    this.watch = settings.listenMetrics
      ? new WatchServer({ facts: () => this.watchFacts(), tickAgeMs }, settings.listenMetrics)
      : null
    this.notice = notify ? new ServiceNotice({ runProgram, clock, logger, tickAgeMs }, notify) : null
  }

  /** @throws Error where the metrics port cannot be taken */
  async start(): Promise<void> {
    const port = await this.watch?.start()
    if (port !== undefined) this.components.logger.info({ port }, 'metrics, health and status are served')
    this.neighbourhood?.start()
    this.notice?.start()
  }

  async stop(): Promise<void> {
    await Promise.all([this.neighbourhood?.stop(), this.watch?.stop(), this.notice?.stop()])
  }

  private createNeighbourhood(): Neighbourhood | null {
    const { clock, logger, runProgram, resolveSrv } = this.components
    const { settings, agent, post } = this.init
    const { source, agentsAt, address, node } = settings
    const rule = readRule(agentsAt)
    if (source === null || !rule.ok) return null
    return new Neighbourhood(
      {
        clock,
        logger,
        keeper: {
          addNeighbour: (spec) => agent.addNeighbour(spec),
          removeNeighbour: (key) => agent.removeNeighbour(key),
          setLinkQuality: (key, quality) => agent.setLinkQuality(key, quality),
          answering: () => answering(agent),
        },
        createSource: (init) => createSource({ clock, post, runProgram, resolveSrv }, source, init),
        fetchDirectory: (etag, signal) => agent.directory(etag, signal),
      },
      {
        rule: rule.rule,
        self: () => ({ agentId: agent.agentId, address: address ?? agent.address, node }),
        onFacts: (facts) => {
          this.facts = facts
          agent.noteSource(facts)
        },
      },
    )
  }

  private watchFacts(): WatchFacts {
    const { agent, pace } = this.init
    const { clock, version, residentBytes } = this.components
    return {
      status: agent.status(),
      version,
      uptimeSeconds: (clock.monotonicMs() - this.startedAtMs) / 1000,
      intervalMs: pace.intervalMs,
      withoutAgent: this.facts?.withoutAgent ?? 0,
      residentBytes: residentBytes(),
    }
  }
}

function answering(agent: Agent): ReadonlySet<string> {
  const keys = new Set<string>()
  for (const { peer, address, state } of agent.status().links) {
    if (peer === null || state === 'unknown') continue
    keys.add(peer)
    if (address !== null) keys.add(address)
  }
  return keys
}
