import { readFile } from 'node:fs/promises'
import { keysFromPem } from '@/lib/protocol'
import { type CollectorClient, type CollectorError, isEnded, mayRetry } from '../collector/client'
import { createHttpCollector } from '../collector/http-client'
import type { Post } from '../collector/post'
import { Reporter } from '../collector/reporter'
import type { AgentConfig } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import type { WsTls } from '../transport/ws'
import { type CommandComponents, reasonOf } from './components'

export interface Contact {
  post: Post
  collector: CollectorClient
  reporter: Reporter
}

/** What a command says to the collector in the agent's name. @throws Error where a file of `tls` cannot be read */
export async function contactOf(components: CommandComponents, config: AgentConfig): Promise<Contact> {
  const { clock, randomBytes, version } = components
  const post = components.createPost({ ca: (await tlsOf(config))?.ca })
  const collector = createHttpCollector({ post, clock }, { baseUrl: config.collector })
  const host = (await components.hostFingerprint()) ?? undefined
  const reporter = new Reporter(
    { client: collector, clock, keys: keysFromPem(config.privateKey), randomBytes },
    {
      agentId: config.agentId,
      onPass: () => {},
      onSession: () => {},
      facts: () => ({ host, version }),
    },
  )
  return { post, collector, reporter }
}

/** Texts of the files that `tls` names. @throws Error with the member, where one cannot be read */
export async function tlsOf({ tls }: Pick<AgentConfig, 'tls'>): Promise<WsTls | undefined> {
  if (!tls) return undefined
  const pem = async (member: 'ca' | 'cert' | 'key') => {
    const path = tls[member]
    if (path === null) return undefined
    return readFile(path, 'utf8').catch((error: unknown) => {
      throw new Error(`tls.${member} cannot be read: ${reasonOf(error)}`)
    })
  }
  return { ca: await pem('ca'), cert: await pem('cert'), key: await pem('key') }
}

export const isCloned = (error: CollectorError): boolean =>
  error.code === 'refused' && error.problem.code === 'cloned-key'

export function exitOf(error: CollectorError): ExitCode {
  if (isEnded(error)) return EXIT.ended
  return error.code === 'refused' && !mayRetry(error) ? EXIT.refused : EXIT.unreachable
}
