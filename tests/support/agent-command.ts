import { randomBytes } from 'node:crypto'
import type { Clock } from '@/agent'
import { createPost, silentLogger } from '@/agent'
import type { CommandComponents } from '@/agent/command'
import type { Options } from '@/agent/command/options'
import { runProgram } from '@/agent/sources'
import { createRandom } from '@/lib/method/random'

export interface Spoken {
  said: string[]
  complaints: string[]
}

/** What a command of the agent works with, and all it says. */
export function commandComponents(
  clock: Clock,
  over: Partial<CommandComponents> = {},
): CommandComponents & Spoken {
  const said: string[] = []
  const complaints: string[] = []
  return {
    clock,
    random: createRandom('command'),
    randomBytes,
    createPost,
    logger: silentLogger,
    say: (line) => said.push(line),
    complain: (line) => complaints.push(line),
    version: '0.0.0-test',
    hostFingerprint: async () => 'host-of-the-tests',
    runProgram,
    resolveSrv: async () => [],
    ownFile: null,
    nodeProgram: process.execPath,
    nodeVersion: process.versions.node,
    residentBytes: () => process.memoryUsage.rss(),
    notify: null,
    said,
    complaints,
    ...over,
  }
}

export const commandOptions = (over: Partial<Options> & Pick<Options, 'config'>): Options => ({
  collector: null,
  code: null,
  name: null,
  listen: null,
  address: null,
  labels: {},
  neighbours: [],
  node: null,
  source: null,
  agentsAt: null,
  listenMetrics: null,
  spool: null,
  tls: null,
  upgrades: null,
  enrolIfNeeded: false,
  json: false,
  yes: false,
  reason: '',
  ...over,
})
