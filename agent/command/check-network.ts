import type { Directory } from '@/lib/protocol'
import { describeCollectorError } from '../collector/client'
import type { Post } from '../collector/post'
import type { AgentConfig } from '../config'
import { type CommandComponents, reasonOf } from './components'
import { bad, type Finding, good } from './finding'
import { contactOf, isCloned } from './session'

const HEALTH_TIMEOUT_MS = 10_000
/** Sessions are refused beyond five minutes; what is off by this much will be before long. */
const MOST_SKEW_MS = 60_000

export interface CollectorContact {
  findings: Finding[]
  /** By the collector's clock where it answered, else by this machine's. */
  nowMs: number
  directory: () => Promise<Directory | null>
}

type Whom = { config: AgentConfig; post: Post } | { config: null; post: Post; collector: string }

export async function collectorFindings(
  components: CommandComponents,
  whom: Whom,
  signal: AbortSignal,
): Promise<CollectorContact> {
  const address = whom.config ? whom.config.collector : whom.collector
  const nothing = { nowMs: components.clock.epochMs(), directory: async () => null }
  const reach = await reachFinding(components, { address, post: whom.post }, signal)
  if (!reach.ok || !whom.config) return { findings: [reach], ...nothing }
  const { reporter } = await contactOf(components, whom.config)
  const session = await reporter.check(signal)
  if (!session.ok) {
    const says = describeCollectorError(session.error)
    const what = isCloned(session.error) ? 'Machine' : 'Session'
    return { findings: [reach, bad(what, says, '')], ...nothing }
  }
  const skewMs = Math.round(reporter.skewMs)
  const clock =
    Math.abs(skewMs) <= MOST_SKEW_MS
      ? good('Clock', `${Math.abs(skewMs)} ms from the collector’s`)
      : bad(
          'Clock',
          `${Math.round(skewMs / 1000)} s behind the collector’s.`,
          'Let this machine keep time by NTP.',
        )
  return {
    findings: [reach, good('Session', 'the collector knows this agent'), clock],
    nowMs: reporter.nowMs(),
    directory: async () => {
      const result = await reporter.directory(null, signal)
      return result.ok ? result.value.directory : null
    },
  }
}

async function reachFinding(
  { clock }: CommandComponents,
  { address, post }: { address: string; post: Post },
  signal: AbortSignal,
): Promise<Finding> {
  const abort = new AbortController()
  const onAbort = () => abort.abort()
  const cancel = clock.after(HEALTH_TIMEOUT_MS, onAbort)
  signal.addEventListener('abort', onAbort, { once: true })
  const what = 'Collector'
  try {
    const url = new URL('api/health', address.endsWith('/') ? address : `${address}/`)
    const reply = await post(url, {
      method: 'GET',
      headers: { accept: 'application/json' },
      body: '',
      signal: abort.signal,
      maxReplyBytes: 64 * 1024,
    })
    if (reply.status === 200) return good(what, `${address} answers`)
    return bad(
      what,
      `${address} answers with status ${reply.status}.`,
      'See whether a proxy stands in between, and whether the server is well.',
    )
  } catch (error) {
    const reason = abort.signal.aborted ? `no answer within ${HEALTH_TIMEOUT_MS / 1000} s` : reasonOf(error)
    return bad(what, `${address} cannot be reached: ${reason}.`, remedyFor(error, address))
  } finally {
    cancel()
    signal.removeEventListener('abort', onAbort)
  }
}

const CERTIFICATE_CODES = /CERT|SELF_SIGNED|UNABLE_TO_VERIFY|ISSUER/

function remedyFor(error: unknown, address: string): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : ''
  const { host } = new URL(address)
  if (CERTIFICATE_CODES.test(code)) return 'Give the certificate of your own authority: --ca FILE.'
  if (code === 'ENOTFOUND' || code === 'EAI_AGAIN') return `See whether this machine can resolve ${host}.`
  if (code === 'ECONNREFUSED') return 'See whether the address and port are right and the server runs.'
  return `Let this machine open connections to ${host}.`
}
