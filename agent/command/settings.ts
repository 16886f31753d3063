import type { AgentConfig } from '../config'
import type { Options } from './options'

/** What counts in this run: what was said on the command line, else what is configured. */
export type Settings = Pick<
  AgentConfig,
  | 'listen'
  | 'address'
  | 'node'
  | 'source'
  | 'agentsAt'
  | 'listenMetrics'
  | 'spool'
  | 'tls'
  | 'upgrades'
  | 'neighbours'
>

export function settingsOf(config: AgentConfig, options: Options): Settings {
  return {
    listen: options.listen ?? config.listen,
    address: options.address ?? config.address,
    node: options.node ?? config.node,
    source: options.source ?? config.source,
    agentsAt: options.agentsAt ?? config.agentsAt,
    listenMetrics: options.listenMetrics ?? config.listenMetrics,
    spool: options.spool ?? config.spool,
    tls: options.tls ?? config.tls,
    upgrades: options.upgrades ?? config.upgrades,
    neighbours: [...new Set([...config.neighbours, ...options.neighbours])],
  }
}
